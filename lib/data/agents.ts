import { type Agent, AgentSchema, type Overlay } from '@/entities'
import type { ActionName } from '@/lib/auth/permissions'
import { endAgent } from '@/lib/collector/end-agent'
import { enterEvent } from '@/lib/collector/events-store'
import { LEADERS_CHANNEL, ORDERS_CHANNEL } from '@/lib/collector/notices'
import { query } from '@/lib/collector/query'
import { eventOf } from '@/lib/collector/said'
import type { OverlayNode } from '@/lib/data/dto'
import { notify } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import { getNode } from './nodes'
import { openOverlayAs } from './overlays'
import { type Sight, sightOf } from './sight'

/** The node's key is good for nothing from now on, and its links are shut at once. Its name stays taken. */
export async function revokeAgent(call: Call, slug: string, name: string): Promise<OverlayNode> {
  const { overlay, agent, sight } = await openAgent(call, 'agent.revoke', slug, name)
  if (agent.state === 'left') throw hasLeft(name)
  const event = eventOf('agent-revoked', [{ node: agent.name }, ' was revoked'])
  await endAgent(call.em, { id: agent.id, overlayId: overlay.id }, 'revoked', event)
  return getNode(call.em, overlay, agent.id, sight)
}

/** Takes the node off the list: not counted any more, its name is free. Also for one that was revoked or left out. */
export async function retireAgent(call: Call, slug: string, name: string): Promise<OverlayNode> {
  const { overlay, agent, sight } = await openAgent(call, 'agent.retire', slug, name)
  const event = eventOf('agent-left', [{ node: agent.name }, ' was retired'])
  await endAgent(call.em, { id: agent.id, overlayId: overlay.id }, 'left', event)
  return getNode(call.em, overlay, agent.id, sight)
}

/** One that was left out because its figures did not hold is of the overlay again. */
export async function readmitAgent(call: Call, slug: string, name: string): Promise<OverlayNode> {
  const { overlay, agent, sight } = await openAgent(call, 'agent.readmit', slug, name)
  if (agent.state === 'left') throw hasLeft(name)
  if (agent.state === 'revoked')
    throw new AppError(
      'wrong-state',
      `"${name}" was revoked, which is for good. Retire it and enrol it with a new key.`,
    )
  const [readmitted] = await query(
    call.em,
    `update agents set state = 'joined', ended_at = null, left_out_because = null
     where id = ? and state = 'left-out' returning id`,
    [agent.id],
  )
  if (readmitted) {
    const event = eventOf('agent-readmitted', [{ node: agent.name }, ' was readmitted'])
    await enterEvent(call.em, overlay.id, event)
    await notify(call.em, ORDERS_CHANNEL, overlay.id)
    await notify(call.em, LEADERS_CHANNEL, overlay.id)
  }
  return getNode(call.em, overlay, agent.id, sight)
}

/**
 * By the name under which the caller sees it: the one that is of the overlay, else the last that left under it. The team
 * that owns the overlay may shut out any; a partner only its own.
 */
async function openAgent(
  call: Call,
  action: ActionName,
  slug: string,
  name: string,
): Promise<{ overlay: Overlay; agent: Agent; sight: Sight }> {
  const { overlay, teamId, standing } = await openOverlayAs(call, action, slug)
  call.note({ subject: `${overlay.slug}: ${name}` })
  const sight = await sightOf(call, overlay)
  const agents = await call.em.find(
    AgentSchema,
    { overlay: overlay.id, ...(sight.isWhole ? { name } : { id: sight.agentNamed(name) }) },
    { orderBy: { joinedAt: 'desc' } },
  )
  const agent = agents.find(({ state }) => state !== 'left') ?? agents[0]
  if (!agent)
    throw new AppError('not-found', `There is no node "${name}" in ${overlay.name}. Load the list again.`)
  if (standing === 'partner' && agent.team?.id !== teamId)
    throw new AppError(
      'forbidden',
      `"${name}" is another team's node. Ask that team, or ${overlay.team.name}, which owns the overlay.`,
    )
  return { overlay, agent, sight }
}

function hasLeft(name: string): AppError {
  return new AppError(
    'wrong-state',
    `"${name}" has left the overlay. To come back it enrols with a joining code.`,
  )
}
