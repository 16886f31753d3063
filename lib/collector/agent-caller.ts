import type { AgentCaller } from '@/lib/auth/caller'
import { sha256Hex } from '@/lib/auth/secrets'
import type { EntityManager } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import { whyNot } from './ingest-entry'
import { findSenders } from './ingest-store'

/** The agent whose session token was sent. */
export async function agentOfSession(em: EntityManager, bearer: string | null): Promise<AgentCaller> {
  if (!bearer) throw new AppError('bad-token', 'Send the session token as "Authorization: Bearer …".')
  const tokenHash = sha256Hex(bearer)
  const sender = (await findSenders(em, [tokenHash])).get(tokenHash)
  const refusal = whyNot(sender)
  if (refusal || !sender) throw refusal
  const { agentId, overlayId, teamId, name } = sender
  return { kind: 'agent', agentId, overlayId, teamId, name }
}

/** For the functions behind agents' routes, once their action is allowed. */
export function callingAgent({ caller }: Call): AgentCaller {
  if (caller.kind !== 'agent') throw new Error('Something that is no agent asked for what only agents may.')
  return caller
}
