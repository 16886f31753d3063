import { access, constants, stat } from 'node:fs/promises'
import { dirname, resolve } from 'node:path'
import type { AgentConfig, ConfigResult } from '../config'
import { type CommandComponents, reasonOf } from './components'
import { bad, type Finding, good } from './finding'
import type { Settings } from './settings'

const LEAST_NODE_MAJOR = 20

export function machineFindings({ nodeVersion }: Pick<CommandComponents, 'nodeVersion'>): Finding[] {
  const major = Number(nodeVersion.split('.')[0])
  if (major >= LEAST_NODE_MAJOR) return [good('Node.js', nodeVersion)]
  return [bad('Node.js', `${nodeVersion} is too old.`, `Install ${LEAST_NODE_MAJOR} or later.`)]
}

const CONFIG = 'Configuration'

export async function configFindings(path: string, read: ConfigResult): Promise<Finding[]> {
  if (!read.ok) return [configFault(path, read.error)]
  const findings = [good(CONFIG, `${path}, ${read.config.name} in ${read.config.overlay.name}`)]
  const mode = (await stat(path)).mode & 0o777
  if ((mode & 0o077) !== 0) {
    const says = `${path} can be opened by others (mode ${mode.toString(8)}), and the private key is in it.`
    findings.push(bad('Rights', says, `chmod 600 ${path}`))
  }
  return findings
}

function configFault(path: string, error: Extract<ConfigResult, { ok: false }>['error']): Finding {
  switch (error.code) {
    case 'missing':
      return bad(CONFIG, `${path} is not there.`, 'Enrol first, or give --config.')
    case 'unfinished':
      return bad(
        CONFIG,
        `${path} was begun by an enrolment that did not finish.`,
        'Enrol again, with the same --config.',
      )
    case 'unreadable':
      return bad(CONFIG, `${path} cannot be read: ${error.reason}.`, 'Run as the user it belongs to.')
    case 'invalid':
      return bad(
        CONFIG,
        `${path}: ${error.issue}.`,
        'Correct that member, or move the file away and enrol anew.',
      )
  }
}

export function keyFindings({ pendingKey }: AgentConfig): Finding[] {
  if (!pendingKey) return [good('Key', 'a good Ed25519 key')]
  return [bad('Key', 'a change was begun and did not finish.', 'Finish it: thinspan-agent rotate-key.')]
}

/** `nowMs` by the collector's clock where it answered. */
export function passFinding({ passExpiresAt }: AgentConfig, nowMs: number): Finding {
  if (Date.parse(passExpiresAt) > nowMs) return good('Pass', `good until ${passExpiresAt}`)
  // An agent that was off for longer than a pass lasts has one that is over, and gets another at its first session.
  return good('Pass', `over since ${passExpiresAt}; the first session brings a new one`)
}

export async function spoolFinding({ spool }: Settings): Promise<Finding | null> {
  if (spool === null) return null
  const what = 'Spool'
  try {
    // The agent makes what is missing below.
    let folder = dirname(resolve(spool))
    while (!(await exists(folder)) && folder !== dirname(folder)) folder = dirname(folder)
    if (!(await stat(folder)).isDirectory()) throw new Error(`${folder} is no folder`)
    await access(folder, constants.W_OK)
    return good(what, `${dirname(spool)} can be written`)
  } catch (error) {
    return bad(
      what,
      `${dirname(spool)} cannot be written: ${reasonOf(error)}.`,
      'Give the agent’s user a folder of its own: --spool.',
    )
  }
}

const exists = (path: string): Promise<boolean> =>
  stat(path).then(
    () => true,
    () => false,
  )
