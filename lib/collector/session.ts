import type { Agent, Overlay } from '@/entities'
import type { AgentCaller } from '@/lib/auth/caller'
import { newSecret, sha256Hex } from '@/lib/auth/secrets'
import type { EntityManager } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import {
  type PassGrant,
  type SessionReply,
  type SessionRequest,
  sessionText,
  verifyText,
} from '@/lib/protocol'
import { callingAgent } from './agent-caller'
import { agentEnded, assertRecent, callerOf, findAgent } from './agent-proof'
import { clonedEvent, isUsedElsewhere, usedElsewhere } from './clone'
import { enterEventOnce } from './events-store'
import { mayReport } from './ingest-entry'
import { findRings } from './key-turn'
import { grantPass, notePasses, PASS_LIFE_MS } from './passes'
import { query } from './query'

export const AGENT_SESSION_MS = 3_600_000

/** That the agent holds the key it enrolled with, now. */
export async function proveSession(
  em: EntityManager,
  request: SessionRequest,
  now: Date,
): Promise<AgentCaller> {
  const agent = await findAgent(em, request.agentId)
  assertRecent(request.at, now)
  if (!verifyText(agent.publicKey, sessionText(request), request.signature))
    throw new AppError(
      'bad-signature',
      'The signature does not fit the key this agent enrolled with. Use that key, or enrol anew.',
    )
  if (!mayReport(agent)) throw agentEnded()
  return callerOf(agent)
}

export async function openSession(call: Call, request: SessionRequest): Promise<SessionReply> {
  const { em, now } = call
  authorise(call, 'agent.session')
  const agent = await findAgent(em, callingAgent(call).agentId)
  const { overlay } = agent
  if (await isUsedElsewhere(em, agent, request.host, overlay.pace)) {
    await enterEventOnce(em, overlay.id, clonedEvent(agent.name))
    throw usedElsewhere(agent.name, overlay.pace)
  }
  const grant = await passFor(em, agent, overlay, now)
  const token = newSecret()
  const expiresAt = new Date(now.getTime() + AGENT_SESSION_MS)
  await query(em, 'delete from agent_sessions where agent_id = ? and expires_at <= ?', [agent.id, now])
  const [opened] = await query(
    em,
    `insert into agent_sessions (token_hash, agent_id, expires_at, nonce, pass_expires_at)
     values (?, ?, ?, ?, ?) on conflict (agent_id, nonce) do nothing returning agent_id`,
    [sha256Hex(token), agent.id, expiresAt, request.nonce, grant.passExpiresAt],
  )
  if (!opened)
    throw new AppError('proof-used', 'This proof has opened a session already. Sign one with a new nonce.')
  await noteWhereabouts(em, agent, request)
  return {
    token,
    expiresAt: expiresAt.toISOString(),
    serverTime: now.toISOString(),
    ...grant,
    disclosure: overlay.disclosure,
    pace: overlay.pace,
    keyRings: await findRings(em, overlay.id, 1),
    weights: overlay.weights,
  }
}

/** Not for an agent that was ended while it asked. */
export async function passFor(
  em: EntityManager,
  { id, name, publicKey }: Pick<Agent, 'id' | 'name' | 'publicKey'>,
  overlay: Overlay,
  now: Date,
): Promise<PassGrant> {
  const may = await notePasses(em, [id], now.getTime() + PASS_LIFE_MS)
  if (!may.has(id)) throw agentEnded()
  const issuer = { overlayId: overlay.id, publicKey: overlay.publicKey, privateKey: overlay.privateKey }
  return grantPass(issuer, { agentId: id, name, publicKey }, now.getTime())
}

/** What is left out stays as it was. */
async function noteWhereabouts(
  em: EntityManager,
  agent: Agent,
  { host, version, address, node }: Pick<SessionRequest, 'host' | 'version' | 'address' | 'node'>,
): Promise<void> {
  await query(em, 'update agents set host = ?, version = ?, address = ?, node = ? where id = ?', [
    host ?? agent.host ?? null,
    version ?? agent.version,
    address === undefined ? (agent.address ?? null) : address,
    node === undefined ? (agent.node ?? null) : node,
    agent.id,
  ])
}
