import { type Agent, AgentSchema, JoiningCodeSchema, type Overlay } from '@/entities'
import type { AgentCaller } from '@/lib/auth/caller'
import { hashJoiningCode } from '@/lib/auth/secrets'
import { stateOf, takeJoiningCode } from '@/lib/data/joining-codes'
import { type EntityManager, notify } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { authorise, type Call } from '@/lib/http/call'
import { assertStorable } from '@/lib/http/storable'
import { type EnrolReply, type EnrolRequest, enrolText, verifyText } from '@/lib/protocol'
import { agentEnded } from './agent-proof'
import { clonedKey, isUsedElsewhere, usedElsewhere } from './clone'
import { enterEvent } from './events-store'
import { mayReport } from './ingest-entry'
import { LEADERS_CHANNEL } from './notices'
import { PASS_TAIL_MS } from './passes'
import { isPseudonym } from './pseudonym'
import { query } from './query'
import { eventOf } from './said'
import { passFor } from './session'

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
  const teamId = code.team?.id ?? overlay.team.id
  call.note({ teamId, subject: `${overlay.slug}: ${request.name}` })
  authorise(call, 'agent.enrol', teamId)
  if (isPseudonym(request.name)) throw nameTaken(overlay, request.name)
  const known = await findByName(call, overlay, request.name)
  if (known) return enrolAgain(call, overlay, known, request, teamId)
  await assertNewKey(call, overlay, request, teamId)
  if (!(await takeJoiningCode(em, request.code, now))) {
    const state = stateOf(code, now)
    throw codeRefused(state === 'open' ? 'used' : state)
  }
  const agentId = await insertAgent(call, overlay, request, teamId)
  if (agentId === null) {
    // Someone took the name since it was looked up.
    const other = await findByName(call, overlay, request.name)
    if (!other) throw nameTaken(overlay, request.name)
    const again = await enrolAgain(call, overlay, other, request, teamId)
    await query(em, 'update joining_codes set used = used - 1 where id = ?', [code.id])
    return again
  }
  await replaceLeft(em, overlay.id, request.name)
  await enterEvent(em, overlay.id, eventOf('agent-joined', [{ node: request.name }, ' joined']))
  await notify(em, LEADERS_CHANNEL, overlay.id)
  return { created: true, reply: await replyTo(call, overlay, agentId, request) }
}

/** Whoever has left gives the name free. */
function findByName({ em }: Call, overlay: Overlay, name: string): Promise<Agent | null> {
  return em.findOne(AgentSchema, { overlay: overlay.id, name, state: { $ne: 'left' } })
}

/** The same agent asks again, after a lost answer or on a new start: it gets the same answer. */
async function enrolAgain(
  call: Call,
  overlay: Overlay,
  agent: Agent,
  request: EnrolRequest,
  teamId: string,
): Promise<Enrolment> {
  // Also with the right key: an agent stays with the team whose code it used first.
  if (agent.publicKey !== request.publicKey || agent.team?.id !== teamId)
    throw agent.state === 'revoked' ? nameRevoked(overlay, agent.name) : nameTaken(overlay, agent.name)
  if (!mayReport(agent))
    throw new AppError(
      'agent-ended',
      'This agent left the overlay or was revoked. Enrol with a new key under another name.',
    )
  if (await isUsedElsewhere(call.em, agent, request.host, overlay.pace))
    throw usedElsewhere(agent.name, overlay.pace)
  await query(
    call.em,
    'update agents set labels = ?::jsonb, address = ?, version = ?, node = ?, host = ? where id = ?',
    [
      JSON.stringify(request.labels),
      request.address,
      request.version,
      request.node === undefined ? (agent.node ?? null) : request.node,
      request.host ?? agent.host ?? null,
      agent.id,
    ],
  )
  return { created: false, reply: await replyTo(call, overlay, agent.id, request) }
}

/** A key stands for one agent: under another name it is that of a copied machine, or of one that has ended. */
async function assertNewKey(
  { em }: Call,
  overlay: Overlay,
  { publicKey }: EnrolRequest,
  teamId: string,
): Promise<void> {
  const others = await em.find(AgentSchema, { overlay: overlay.id, publicKey })
  const present = others.find(mayReport)
  if (present)
    throw clonedKey(present.team?.id === teamId ? present.name : "another team's node", 'This is already')
  if (others.length > 0) throw agentEnded()
}

/** @returns null where the name is taken */
async function insertAgent(
  call: Call,
  overlay: Overlay,
  request: EnrolRequest,
  teamId: string,
): Promise<string | null> {
  const [row] = await query<{ id: string }>(
    call.em,
    `insert into agents (overlay_id, team_id, name, public_key, labels, address, version, node, host, joined_at)
     values (?, ?, ?, ?, ?::jsonb, ?, ?, ?, ?, ?)
     on conflict (overlay_id, name) where state <> 'left' do nothing returning id`,
    [
      overlay.id,
      teamId,
      request.name,
      request.publicKey,
      JSON.stringify(request.labels),
      request.address,
      request.version,
      request.node ?? null,
      request.host ?? null,
      call.now,
    ],
  )
  return row?.id ?? null
}

/** Those who left under the name make room; links to them stay shut while a pass of theirs may be good. */
async function replaceLeft(em: EntityManager, overlayId: string, name: string): Promise<void> {
  await query(em, "delete from shut_agents where until < clock_timestamp() - ? * interval '1 millisecond'", [
    PASS_TAIL_MS,
  ])
  await query(
    em,
    `with gone as (delete from agents where overlay_id = ? and name = ? and state = 'left'
       returning id, overlay_id, pass_ends_at)
     insert into shut_agents (agent_id, overlay_id, until)
     select id, overlay_id, pass_ends_at from gone where pass_ends_at is not null`,
    [overlayId, name],
  )
}

async function replyTo(
  { em, now }: Call,
  overlay: Overlay,
  agentId: string,
  { name, publicKey }: EnrolRequest,
): Promise<EnrolReply> {
  return {
    agentId,
    overlay: { id: overlay.id, slug: overlay.slug, name: overlay.name },
    pace: overlay.pace,
    weights: overlay.weights,
    disclosure: overlay.disclosure,
    overlayKey: overlay.publicKey,
    ...(await passFor(em, { id: agentId, name, publicKey }, overlay, now)),
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

function nameRevoked(overlay: Overlay, name: string): AppError {
  return new AppError(
    'name-taken',
    `"${name}" was revoked in ${overlay.name}. An operator can retire it on the page Nodes, which gives the name free; or enrol under another name.`,
  )
}
