import { AgentSchema } from '@/entities'
import type { AgentCaller } from '@/lib/auth/caller'
import { newSecret, sha256Hex } from '@/lib/auth/secrets'
import type { EntityManager } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import {
  SESSION_SKEW_SECONDS,
  type SessionReply,
  type SessionRequest,
  sessionText,
  verifyText,
} from '@/lib/protocol'
import { grantPass } from './passes'
import { query } from './query'

export const AGENT_SESSION_MS = 3_600_000

const UUID = /^[0-9a-f]{8}(?:-[0-9a-f]{4}){3}-[0-9a-f]{12}$/i

/** That the agent holds the key it enrolled with, now. */
export async function proveSession(
  em: EntityManager,
  request: SessionRequest,
  now: Date,
): Promise<AgentCaller> {
  const agent = UUID.test(request.agentId)
    ? await em.findOne(AgentSchema, request.agentId, { populate: ['overlay'] })
    : null
  if (!agent)
    throw new AppError('unknown-agent', 'There is no agent with this id. Enrol with a joining code.')
  const skewMs = Math.abs(Date.parse(request.at) - now.getTime())
  if (skewMs > SESSION_SKEW_SECONDS * 1000)
    throw new AppError(
      'clock-skew',
      `The proof is ${Math.round(skewMs / 1000)} s off; at most ${SESSION_SKEW_SECONDS} s are allowed. Correct the clock by serverTime and try again.`,
      { members: { serverTime: now.toISOString() } },
    )
  if (!verifyText(agent.publicKey, sessionText(request), request.signature))
    throw new AppError(
      'bad-signature',
      'The signature does not fit the key this agent enrolled with. Use that key, or enrol anew.',
    )
  if (agent.state !== 'joined') throw agentEnded()
  const { overlay } = agent
  return {
    kind: 'agent',
    agentId: agent.id,
    overlayId: overlay.id,
    teamId: overlay.team.id,
    name: agent.name,
  }
}

export async function openSession(call: Call, request: SessionRequest): Promise<SessionReply> {
  const { em, caller, now } = call
  authorise(call, 'agent.session')
  if (caller.kind !== 'agent') throw new Error('A session was asked for by something that is no agent.')
  const agent = await em.findOneOrFail(AgentSchema, caller.agentId, { populate: ['overlay'] })
  const { overlay } = agent
  const issuer = { overlayId: overlay.id, publicKey: overlay.publicKey, privateKey: overlay.privateKey }
  const holder = { agentId: agent.id, name: agent.name, publicKey: agent.publicKey }
  const grant = await grantPass(issuer, holder, now.getTime())
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
  return {
    token,
    expiresAt: expiresAt.toISOString(),
    serverTime: now.toISOString(),
    ...grant,
    disclosure: overlay.disclosure,
    pace: overlay.pace,
  }
}

export function agentEnded(): AppError {
  return new AppError(
    'agent-ended',
    'This agent left the overlay or was revoked. To come back it needs a new key and a joining code.',
  )
}
