import { type Agent, AgentSchema } from '@/entities'
import type { AgentCaller } from '@/lib/auth/caller'
import type { EntityManager } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { SESSION_SKEW_SECONDS } from '@/lib/protocol'

const UUID = /^[0-9a-f]{8}(?:-[0-9a-f]{4}){3}-[0-9a-f]{12}$/i

/** @throws AppError where there is none */
export async function findAgent(em: EntityManager, agentId: string): Promise<Agent> {
  const agent = UUID.test(agentId) ? await em.findOne(AgentSchema, agentId, { populate: ['overlay'] }) : null
  if (!agent)
    throw new AppError('unknown-agent', 'There is no agent with this id. Enrol with a joining code.')
  return agent
}

/** A proof is of now, so that an old one is worth nothing. */
export function assertRecent(at: string, now: Date): void {
  const skewMs = Math.abs(Date.parse(at) - now.getTime())
  if (skewMs <= SESSION_SKEW_SECONDS * 1000) return
  throw new AppError(
    'clock-skew',
    `The proof is ${Math.round(skewMs / 1000)} s off; at most ${SESSION_SKEW_SECONDS} s are allowed. Correct the clock by serverTime and try again.`,
    { members: { serverTime: now.toISOString() } },
  )
}

export function callerOf({ id, name, overlay, team }: Agent): AgentCaller {
  return { kind: 'agent', agentId: id, overlayId: overlay.id, teamId: team?.id ?? overlay.team.id, name }
}

export function agentEnded(): AppError {
  return new AppError(
    'agent-ended',
    'This agent left the overlay or was revoked. To come back it needs a new key and a joining code.',
  )
}
