import { z } from 'zod'
import type { MomentNode } from '@/lib/collector/moment'
import { query } from '@/lib/collector/query'
import { SIDES } from '@/lib/data/dto'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import { type KeptRange, keptOf } from './kept-moments'
import { namedLinks } from './links'
import { mentionsOf } from './mentions'
import { nodeNamed } from './nodes'
import { openOverlayAs } from './overlays'
import { memoryOf } from './readings'
import { sightOf } from './sight'
import { lastSchema, type NodeStory } from './weak-dto'

export const storyQuerySchema = z.object({ last: lastSchema.default('3h') })
export type StoryQuery = z.output<typeof storyQuerySchema>

/** One node: as it is, its neighbours as disclosed, its course over kept moments, and the incidents that name it. */
export async function getNodeStory(
  call: Call,
  slug: string,
  name: string,
  { last }: StoryQuery,
): Promise<NodeStory> {
  const { overlay, teamId } = await openOverlayAs(call, 'node.list', slug)
  const memory = await memoryOf(call.em, overlay.id)
  const sight = await sightOf(call, overlay)
  const node = await nodeNamed(call.em, overlay, memory, name, sight)
  // What is kept of it has the node's own name.
  const kept = sight.nameBehind(name)
  if (!node || kept === null) throw noSuchNode(name)
  const links = (await namedLinks(call.em, overlay, memory, sight)).filter(
    ({ a, b }) => a === name || b === name,
  )
  const live = links.filter(({ state }) => state === 'live').length
  return {
    node,
    disclosure: overlay.disclosure,
    links,
    unnamed: Math.max(0, (node.state === 'heard' ? (node.degree ?? 0) : 0) - live),
    course: await courseOf(call, { overlayId: overlay.id, last, toMs: call.now.getTime() }, kept),
    incidents: await mentionsOf(call, { overlayId: overlay.id, teamId }, [kept]),
  }
}

export function noSuchNode(name: string): AppError {
  return new AppError('not-found', `There is no node ${name} in this overlay. Look it up on the Nodes page.`)
}

const LETTERS: Record<string, MomentNode['state']> = { h: 'heard', d: 'detached' }

/** What snapshots say of the node in its place. */
async function courseOf({ em }: Call, range: KeptRange, name: string): Promise<NodeStory['course']> {
  const numbers = await query<{ number: number }>(
    em,
    'select number from snapshot_nodes where overlay_id = ? and name = ?',
    [range.overlayId, name],
  )
  const course: NodeStory['course'] = []
  // A name may have been several agents'; of one moment it is one's.
  for (const { number } of numbers) {
    // Numbers are whole by their schema's type, so they may stand in the text.
    const place = `(select coalesce(sum(least(upper(part), ${number}) - lower(part)), 0)::int + 1
      from unnest(nodes) part where lower(part) < ${number})`
    const rows = await keptOf<{
      value: number | null
      degree: number | null
      weightedDegree: number | null
      side: string
      state: string
    }>(
      em,
      range,
      `case when nodes @> ${number} then "values"[${place}] end as value,
       degrees[${place}] as degree, weighted_degrees[${place}] as "weightedDegree",
       substr(sides, ${place}, 1) as side, case when nodes @> ${number} then substr(states, ${place}, 1) end as state`,
    )
    course.push(
      ...rows
        .filter(({ state }) => state !== null)
        .map(({ atMs, side, state, ...rest }) => ({
          at: new Date(atMs).toISOString(),
          ...rest,
          side: SIDES.find((each) => each === side) ?? null,
          state: LETTERS[state] ?? ('unheard' as const),
        })),
    )
  }
  return course.sort((one, other) => (one.at < other.at ? -1 : 1))
}
