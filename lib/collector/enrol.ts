import { type Agent, AgentSchema, JoiningCodeSchema, type Overlay } from '@/entities'
import type { AgentCaller } from '@/lib/auth/caller'
import { hashJoiningCode } from '@/lib/auth/secrets'
import { stateOf, takeJoiningCode } from '@/lib/data/joining-codes'
import { notify } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import { assertStorable } from '@/lib/http/storable'
import { type EnrolReply, type EnrolRequest, enrolText, verifyText } from '@/lib/protocol'
import { LEADERS_CHANNEL, tell } from './notices'
import { grantPass } from './passes'
import { query } from './query'

export interface Enrolment {
  /** False where the same key enrolled under the same name before. */
  created: boolean
  reply: EnrolReply
}

/** That the agent holds the key it wants to enrol. It has no id and no team yet. */
export function proveEnrolment(request: EnrolRequest): AgentCaller {
  assertStorable(request)
  if (!verifyText(request.publicKey, enrolText(request), request.signature))
    throw new AppError(
      'bad-signature',
      'The signature does not fit the code, the name and the key. Sign again with the key that is sent.',
    )
  return { kind: 'agent', agentId: '', overlayId: '', teamId: null, name: request.name }
}

/** Joins an agent to the overlay of its code. In one transaction: a failed enrolment gives the code's use back. */
export async function enrolAgent(call: Call, request: EnrolRequest): Promise<Enrolment> {
  const { em, now } = call
  const code = await em.findOne(
    JoiningCodeSchema,
    { hash: hashJoiningCode(request.code) },
    { populate: ['overlay', 'overlay.team'] },
  )
  if (!code) throw codeRefused('unknown')
  const { overlay } = code
  call.note({ teamId: overlay.team.id, subject: `${overlay.slug}: ${request.name}` })
  authorise(call, 'agent.enrol', overlay.team.id)
  const known = await findByName(call, overlay, request.name)
  if (known) return enrolAgain(call, overlay, known, request)
  if (!(await takeJoiningCode(em, request.code, now))) {
    const state = stateOf(code, now)
    throw codeRefused(state === 'open' ? 'used' : state)
  }
  const agentId = await insertAgent(call, overlay, request)
  if (agentId === null) {
    // Someone took the name since it was looked up.
    const other = await findByName(call, overlay, request.name)
    if (!other) throw nameTaken(overlay, request.name)
    const again = await enrolAgain(call, overlay, other, request)
    await query(em, 'update joining_codes set used = used - 1 where id = ?', [code.id])
    return again
  }
  await query(em, 'insert into overlay_events (overlay_id, at, kind, text) values (?, ?, ?, ?)', [
    overlay.id,
    now,
    'agent-joined',
    `${request.name} joined`,
  ])
  await tell(em, overlay.id, { kind: 'event' })
  await notify(em, LEADERS_CHANNEL, overlay.id)
  return { created: true, reply: await replyTo(overlay, agentId, request, now) }
}

function findByName({ em }: Call, overlay: Overlay, name: string): Promise<Agent | null> {
  return em.findOne(AgentSchema, { overlay: overlay.id, name })
}

/** The same agent asks again, after a lost answer or on a new start: it gets the same answer. */
async function enrolAgain(
  call: Call,
  overlay: Overlay,
  agent: Agent,
  request: EnrolRequest,
): Promise<Enrolment> {
  if (agent.publicKey !== request.publicKey) throw nameTaken(overlay, request.name)
  if (agent.state !== 'joined')
    throw new AppError(
      'agent-ended',
      'This agent left the overlay or was revoked. Enrol with a new key under another name.',
    )
  await query(call.em, 'update agents set labels = ?::jsonb, address = ?, version = ? where id = ?', [
    JSON.stringify(request.labels),
    request.address,
    request.version,
    agent.id,
  ])
  return { created: false, reply: await replyTo(overlay, agent.id, request, call.now) }
}

/** @returns null where the name is taken */
async function insertAgent(call: Call, overlay: Overlay, request: EnrolRequest): Promise<string | null> {
  const [row] = await query<{ id: string }>(
    call.em,
    `insert into agents (overlay_id, name, public_key, labels, address, version, joined_at)
     values (?, ?, ?, ?::jsonb, ?, ?, ?) on conflict (overlay_id, name) do nothing returning id`,
    [
      overlay.id,
      request.name,
      request.publicKey,
      JSON.stringify(request.labels),
      request.address,
      request.version,
      call.now,
    ],
  )
  return row?.id ?? null
}

async function replyTo(
  overlay: Overlay,
  agentId: string,
  { name, publicKey }: EnrolRequest,
  now: Date,
): Promise<EnrolReply> {
  const issuer = { overlayId: overlay.id, publicKey: overlay.publicKey, privateKey: overlay.privateKey }
  return {
    agentId,
    overlay: { id: overlay.id, slug: overlay.slug, name: overlay.name },
    pace: overlay.pace,
    weights: overlay.weights,
    disclosure: overlay.disclosure,
    overlayKey: overlay.publicKey,
    ...(await grantPass(issuer, { agentId, name, publicKey }, now.getTime())),
  }
}

const REFUSALS = {
  unknown: 'There is no such joining code. Check it for slips, or ask for a new one.',
  used: 'The joining code has no uses left. Ask for a new one.',
  expired: 'The joining code has expired. Ask for a new one.',
  revoked: 'The joining code was revoked. Ask for a new one.',
} as const

function codeRefused(reason: keyof typeof REFUSALS): AppError {
  return new AppError('code-refused', REFUSALS[reason], { members: { reason } })
}

function nameTaken(overlay: Overlay, name: string): AppError {
  return new AppError(
    'name-taken',
    `Another agent is called "${name}" in ${overlay.name}. Enrol under another name, or start this one with the key it enrolled with.`,
  )
}
