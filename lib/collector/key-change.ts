import { AgentSchema } from '@/entities'
import type { AgentCaller } from '@/lib/auth/caller'
import type { EntityManager } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import { type KeyChangeReply, type KeyChangeRequest, keyChangeText, verifyText } from '@/lib/protocol'
import { callingAgent } from './agent-caller'
import { agentEnded, assertRecent, callerOf, findAgent } from './agent-proof'
import { clonedKey } from './clone'
import { mayReport } from './ingest-entry'
import { query } from './query'
import { passFor } from './session'

/** That the agent holds the key in force and the new one, now; or, after a lost answer, the new one in force. */
export async function proveKeyChange(
  em: EntityManager,
  request: KeyChangeRequest,
  now: Date,
): Promise<AgentCaller> {
  const agent = await findAgent(em, request.agentId)
  assertRecent(request.at, now)
  const text = keyChangeText(request)
  const isDone = agent.publicKey === request.publicKey
  if (!isDone && !verifyText(agent.publicKey, text, request.signature))
    throw new AppError('bad-signature', 'The signature does not fit the key in force. Sign with that key.')
  if (!verifyText(request.publicKey, text, request.newSignature))
    throw new AppError('bad-signature', 'The new signature does not fit the new key. Sign with both keys.')
  if (!mayReport(agent)) throw agentEnded()
  return callerOf(agent)
}

/**
 * Puts the new key in force. Sessions opened with the old one end: whoever may have copied it is out at once. A pass
 * for the old key is good until it ends.
 */
export async function changeKey(call: Call, request: KeyChangeRequest): Promise<KeyChangeReply> {
  const { em, now } = call
  const { agentId, teamId } = callingAgent(call)
  authorise(call, 'agent.key', teamId)
  await query(em, 'select 1 from agents where id = ? for update', [agentId])
  const agent = await findAgent(em, agentId)
  const { overlay } = agent
  call.note({ subject: `${overlay.slug}: ${agent.name}`, data: { publicKey: request.publicKey } })
  if (agent.publicKey === request.publicKey) {
    call.note({ omit: true })
    return passFor(em, agent, overlay, now)
  }
  if (!verifyText(agent.publicKey, keyChangeText(request), request.signature))
    throw new AppError('bad-signature', 'The key was changed by another request. Sign with the key in force.')
  // The same signed words again, after the key was changed back, would undo it.
  const signedAt = new Date(request.at)
  if (agent.keyChangedAt && signedAt <= agent.keyChangedAt)
    throw new AppError('proof-used', 'The key was changed since this was signed. Sign anew.')
  const other = await em.findOne(AgentSchema, { overlay: overlay.id, publicKey: request.publicKey })
  if (other) throw clonedKey(other.name, 'This is already')
  await query(em, 'update agents set public_key = ?, key_changed_at = ? where id = ?', [
    request.publicKey,
    signedAt,
    agentId,
  ])
  await query(em, 'delete from agent_sessions where agent_id = ?', [agentId])
  return passFor(em, { id: agentId, name: agent.name, publicKey: request.publicKey }, overlay, now)
}
