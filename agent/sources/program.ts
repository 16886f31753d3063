import { spawn } from 'node:child_process'
import { kill } from 'node:process'

export interface ProgramInit {
  timeoutMs: number
  maxOutputBytes: number
  signal: AbortSignal
}

export type ProgramResult =
  | { ok: true; output: string }
  /** It could not be started, ended otherwise than with 0, took too long or said too much. */
  | { ok: false; reason: string }

/** Runs a program to its end, with nothing on its standard input. Never throws. */
export type SpawnProgram = (command: readonly string[], init: ProgramInit) => Promise<ProgramResult>

const MAX_COMPLAINT_CHARS = 200

export const runProgram: SpawnProgram = ([program = '', ...args], init) =>
  new Promise((resolve) => {
    const chunks: Buffer[] = []
    let bytes = 0
    let complaint = ''
    let stopped: string | null = null
    // A group of its own, so that what it started ends with it.
    const child = spawn(program, args, {
      stdio: ['ignore', 'pipe', 'pipe'],
      detached: true,
    })
    const stop = (reason: string) => {
      stopped ??= reason
      try {
        if (child.pid !== undefined) kill(-child.pid, 'SIGKILL')
      } catch {
        child.kill('SIGKILL')
      }
    }
    const timer = setTimeout(() => stop(`took longer than ${init.timeoutMs / 1000} s`), init.timeoutMs)
    const onAbort = () => stop('stopped')
    init.signal.addEventListener('abort', onAbort, { once: true })
    const settle = (result: ProgramResult) => {
      clearTimeout(timer)
      init.signal.removeEventListener('abort', onAbort)
      resolve(result)
    }
    child.stdout.on('data', (chunk: Buffer) => {
      bytes += chunk.length
      if (bytes > init.maxOutputBytes) stop(`said more than ${init.maxOutputBytes} bytes`)
      else chunks.push(chunk)
    })
    child.stderr.on('data', (chunk: Buffer) => {
      if (complaint.length < MAX_COMPLAINT_CHARS) complaint += chunk.toString('utf8')
    })
    child.on('error', (error) => settle({ ok: false, reason: error.message }))
    child.on('close', (code, killedBy) => {
      if (stopped !== null) settle({ ok: false, reason: stopped })
      else if (code === 0) settle({ ok: true, output: Buffer.concat(chunks).toString('utf8') })
      else {
        const said = complaint.trim().slice(0, MAX_COMPLAINT_CHARS)
        settle({ ok: false, reason: `ended with ${killedBy ?? `code ${code}`}${said ? `: ${said}` : ''}` })
      }
    })
    if (init.signal.aborted) onAbort()
  })
