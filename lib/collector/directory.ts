import { createHash } from 'node:crypto'
import { authorise, type Call } from '@/lib/http/call'
import type { Directory } from '@/lib/protocol'
import { callingAgent } from './agent-caller'
import { query } from './query'

/** Every joined agent of the caller's overlay at once, so that asking says nothing about who asks after whom. */
export async function readDirectory(call: Call): Promise<{ json: string; etag: string }> {
  authorise(call, 'agent.directory')
  const { overlayId } = callingAgent(call)
  const items = await query<Directory['items'][number]>(
    call.em,
    `select id as "agentId", name, address, node from agents
     where overlay_id = ? and state = 'joined' order by name collate "C"`,
    [overlayId],
  )
  const json = JSON.stringify({ items } satisfies Directory)
  return { json, etag: `"${createHash('sha256').update(json, 'utf8').digest('base64url')}"` }
}
