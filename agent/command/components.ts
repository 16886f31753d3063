import type { Random } from '@/lib/method/random'
import type { Clock } from '../clock'
import type { Post } from '../collector/post'
import { type AgentConfig, readConfig } from '../config'
import type { Logger } from '../logger'
import type { SpawnProgram } from '../sources/program'
import type { ResolveSrv } from '../sources/read-srv'

export interface CommandComponents {
  clock: Clock
  random: Random
  randomBytes: (count: number) => Uint8Array
  /** With `ca`, PEM certificates trusted instead of the public authorities. */
  createPost: (init: { ca?: string }) => Post
  logger: Logger
  /** One line for the person or program that called. */
  say: (line: string) => void
  complain: (line: string) => void
  version: string
  /** The same for every start on this machine, and another on every other; null where it cannot be told. */
  hostFingerprint: () => Promise<string | null>
  /** Runs a program to its end. */
  runProgram: SpawnProgram
  resolveSrv: ResolveSrv
  /** The one-file program that runs, which an upgrade replaces; null when it runs from source. */
  ownFile: string | null
  /** The program that runs JavaScript. */
  nodeProgram: string
  nodeVersion: string
  residentBytes: () => number
  /** Where the service manager listens; null without one. */
  notify: { watchdogMs: number | null } | null
}

/** The configuration, or null after having said why there is none. */
export async function configOr(
  { complain }: Pick<CommandComponents, 'complain'>,
  { config: path }: { config: string },
): Promise<AgentConfig | null> {
  const result = await readConfig(path)
  if (result.ok) return result.config
  const { error } = result
  if (error.code === 'missing') complain(`${path} is not there. Enrol first, or give --config.`)
  else if (error.code === 'unfinished')
    complain(`${path} was begun by an enrolment that did not finish. Enrol again, with the same --config.`)
  else if (error.code === 'unreadable') complain(`${path} cannot be read: ${error.reason}`)
  else complain(`${path} is no agent's configuration: ${error.issue}`)
  return null
}

export const reasonOf = (error: unknown): string => (error instanceof Error ? error.message : String(error))

export function aborted(signal: AbortSignal): Promise<void> {
  if (signal.aborted) return Promise.resolve()
  return new Promise((resolve) => signal.addEventListener('abort', () => resolve(), { once: true }))
}
