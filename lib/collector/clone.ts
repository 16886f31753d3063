import type { EntityManager } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { heldMs } from '@/lib/method/control'
import { PACES, type PaceName } from '@/lib/method/pace'
import { epochMs, query } from './query'
import { eventOf } from './said'

const REMEDY =
  'On the copy, delete the configuration file with the key, and enrol it with a joining code of its own.'

/** One key, two programs: a machine image was copied with the agent's configuration in it. */
export function clonedKey(name: string, what: string): AppError {
  return new AppError('cloned-key', `${what} the key of "${name}". ${REMEDY}`)
}

/** What is said of it among the overlay's events. */
export const clonedEvent = (name: string) =>
  eventOf('agent-cloned', ['Two programs use the key of ', { node: name }])

/**
 * A key that is used from another machine while the agent is still heard from the first has been copied. A machine that
 * moved was silent for a while, and is let in.
 */
export async function isUsedElsewhere(
  em: EntityManager,
  agent: { id: string; host?: string | null },
  host: string | undefined,
  pace: PaceName,
): Promise<boolean> {
  if (host === undefined || agent.host == null || agent.host === host) return false
  const [heard] = await query<{ ageMs: number }>(
    em,
    `select ${epochMs('clock_timestamp()')} - ${epochMs('received_at')} as "ageMs" from agent_states where agent_id = ?`,
    [agent.id],
  )
  return heard !== undefined && heard.ageMs <= heldMs(PACES[pace].intervalMs)
}

/** The refusal for it. */
export function usedElsewhere(name: string, pace: PaceName): AppError {
  const seconds = Math.ceil(heldMs(PACES[pace].intervalMs) / 1000)
  const error = clonedKey(name, 'Another machine, which is still heard, uses')
  return new AppError(
    error.code,
    `${error.detail} If the agent has moved, stop it at its old place and start this one ${seconds} s later.`,
  )
}
