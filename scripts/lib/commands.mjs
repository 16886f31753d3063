/** Runs a command quietly; its output is shown only when it fails. */
import { spawn } from 'node:child_process'

const TAIL_LINES = 30

export function tailOf(text, lines = TAIL_LINES) {
  return text.trimEnd().split('\n').slice(-lines).join('\n')
}

/**
 * Resolves to { code, output } for the codes in `accept`, else rejects with the end of the output.
 * `account` is { uid, gid } or null for this one; `show` passes the output through as it comes. With `onSpawn`,
 * which hears the pid, the command leads a process group of its own, and an abort ends the group.
 * @param {string} command
 * @param {string[]} args
 * @param {{
 *   cwd?: string, env?: NodeJS.ProcessEnv, account?: { uid: number, gid: number } | null, accept?: number[],
 *   show?: boolean, signal?: AbortSignal, onSpawn?: (pid: number) => void,
 * }} options
 * @returns {Promise<{ code: number, output: string }>}
 */
export function run(
  command,
  args,
  { cwd, env, account = null, accept = [0], show = false, signal, onSpawn } = {},
) {
  return new Promise((resolve, reject) => {
    signal?.throwIfAborted()
    const child = spawn(command, args, {
      cwd,
      env: env ?? process.env,
      detached: onSpawn !== undefined,
      stdio: ['ignore', show ? 'inherit' : 'pipe', show ? 'inherit' : 'pipe'],
      ...(account === null ? {} : { uid: account.uid, gid: account.gid }),
    })
    if (child.pid !== undefined) onSpawn?.(child.pid)
    const end = () => {
      if (onSpawn === undefined || child.pid === undefined) child.kill()
      else process.kill(-child.pid, 'SIGTERM')
    }
    signal?.addEventListener('abort', end, { once: true })
    let output = ''
    for (const stream of [child.stdout, child.stderr]) {
      stream?.setEncoding('utf8').on('data', (text) => {
        output += text
      })
    }
    child.once('exit', () => signal?.removeEventListener('abort', end))
    child.once('error', reject)
    child.once('close', (code, killedBy) => {
      if (signal?.aborted) return reject(signal.reason)
      if (code !== null && accept.includes(code)) return resolve({ code, output })
      const error = new Error(
        `${[command, ...args].join(' ')} ended with ${killedBy ?? code}\n${tailOf(output)}`,
      )
      reject(Object.assign(error, { exitCode: code, killedBy, output }))
    })
  })
}
