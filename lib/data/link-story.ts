import { cursorOf } from '@/lib/collector/namings'
import { epochMs, query } from '@/lib/collector/query'
import type { EntityManager } from '@/lib/db'
import { formatLink } from '@/lib/face/format'
import type { Call } from '@/lib/http/call'
import { EVENTS_LOOKED_AT, lastTurns, linkCourses, type Pair, sinceOf } from './link-courses'
import { namedLinks } from './links'
import { mentionsOf } from './mentions'
import { noSuchNode, type StoryQuery } from './node-story'
import { nodeNamed } from './nodes'
import { openOverlayAs } from './overlays'
import { memoryOf, presentReading } from './readings'
import { sightOf } from './sight'
import type { LinkStory } from './weak-dto'
import { withoutLink } from './weak-place'

const EVENTS_MOST = 50

/** One link between two nodes, in either order: as it is named, its course over kept moments, when it was lost and found. */
export async function getLinkStory(
  call: Call,
  slug: string,
  ends: Pair,
  { last }: StoryQuery,
): Promise<LinkStory> {
  const { overlay, teamId } = await openOverlayAs(call, 'link.list', slug)
  const pair = inOrder(ends.a, ends.b)
  const memory = await memoryOf(call.em, overlay.id)
  const sight = await sightOf(call, overlay)
  const [a, b] = [
    await nodeNamed(call.em, overlay, memory, pair.a, sight),
    await nodeNamed(call.em, overlay, memory, pair.b, sight),
  ]
  if (!a || !b) throw noSuchNode(a ? pair.b : pair.a)
  // What is kept of links has the nodes' own names.
  const kept = inOrder(sight.nameBehind(pair.a) ?? '', sight.nameBehind(pair.b) ?? '')
  const range = { overlayId: overlay.id, last, toMs: call.now.getTime() }
  const links = await namedLinks(call.em, overlay, memory, sight)
  const link = links.find((each) => each.a === pair.a && each.b === pair.b) ?? null
  const course = (await linkCourses(call.em, range, [pair], sight)).get(cursorOf(pair)) ?? []
  const turn = (await lastTurns(call.em, range, sight)).get(cursorOf(pair))
  const silent = new Set([a, b].filter(({ state }) => state === 'unheard').map(({ name }) => name))
  return {
    a,
    b,
    disclosure: overlay.disclosure,
    link,
    since: link?.state === 'live' ? sinceOf(turn, course) : null,
    without: link && withoutLink(link, await presentReading(call.em, overlay, call.now, sight), silent),
    course,
    events: await eventsOf(call.em, overlay.id, kept),
    incidents: await mentionsOf(call, { overlayId: overlay.id, teamId }, [
      formatLink(kept.a, kept.b),
      formatLink(kept.b, kept.a),
    ]),
  }
}

const inOrder = (a: string, b: string): Pair => (a < b ? { a, b } : { a: b, b: a })

async function eventsOf(em: EntityManager, overlayId: string, { a, b }: Pair): Promise<LinkStory['events']> {
  const rows = await query<{ id: string; atMs: number; kind: 'link-lost' | 'link-found' }>(
    em,
    `select id::text, ${epochMs('at')} as "atMs", kind from (
       select id, at, kind, data from overlay_events where overlay_id = ? order by at desc limit ?) event
     where kind in ('link-lost', 'link-found') and data->'links' @> ?::jsonb
     order by at desc, id desc limit ?`,
    [overlayId, EVENTS_LOOKED_AT, JSON.stringify([[a, b]]), EVENTS_MOST],
  )
  return rows.map(({ id, atMs, kind }) => ({
    id,
    at: new Date(atMs).toISOString(),
    kind,
    text: kind === 'link-lost' ? 'lost' : 'found',
  }))
}
