import { createHash } from 'node:crypto'
import { sightAs } from '@/lib/data/sight'
import { authorise, type Call } from '@/lib/http/call'
import type { Directory } from '@/lib/protocol'
import { callingAgent } from './agent-caller'
import { query } from './query'

/**
 * Every joined agent of the caller's overlay at once, so that asking says nothing about who asks after whom. Those of
 * other teams are found by address, or by what the overlay itself calls their node: not by a name that is their team's.
 */
export async function readDirectory(call: Call): Promise<{ json: string; etag: string }> {
  authorise(call, 'agent.directory')
  const { overlayId, teamId } = callingAgent(call)
  const agents = await query<Directory['items'][number]>(
    call.em,
    `select id as "agentId", name, address, node from agents
     where overlay_id = ? and state = 'joined' order by name collate "C"`,
    [overlayId],
  )
  const sight = await sightAs(call.em, overlayId, teamId === null ? [] : [teamId])
  const items = agents.map((agent) => ({ ...agent, name: sight.nameOf(agent) }))
  const json = JSON.stringify({ items } satisfies Directory)
  return { json, etag: `"${createHash('sha256').update(json, 'utf8').digest('base64url')}"` }
}
