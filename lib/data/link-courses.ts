import { cursorOf } from '@/lib/collector/namings'
import { epochMs, query } from '@/lib/collector/query'
import type { EntityManager } from '@/lib/db'
import { type KeptRange, keptOf } from './kept-moments'
import type { Sight } from './sight'
import type { LinkCourse, WeakLink } from './weak-dto'

export interface Pair {
  a: string
  b: string
}
type Kept = [one: number, other: number, weight: number, share: number | null, lost: number]

/** Of more links than this nobody looks at each one's course. */
export const COURSES_MOST = 200

/** What kept snapshots say of links while they crossed the cut, by the names of their ends as they are seen. */
export async function linkCourses(
  em: EntityManager,
  range: KeptRange,
  pairs: readonly Pair[],
  sight: Sight,
): Promise<Map<string, LinkCourse>> {
  const wanted = pairs.slice(0, COURSES_MOST)
  if (wanted.length === 0) return new Map()
  const seen = [...new Set(wanted.flatMap(({ a, b }) => [a, b]))]
  const names = seen.flatMap((name) => sight.nameBehind(name) ?? [])
  const numbers = await query<{ number: number; name: string }>(
    em,
    `select number, name from snapshot_nodes where overlay_id = ?
       and name in (select jsonb_array_elements_text(?::jsonb))`,
    [range.overlayId, JSON.stringify(names)],
  )
  const nameOf = new Map(numbers.map(({ number, name }) => [number, sight.named(name)]))
  const courses = new Map(wanted.map((pair) => [cursorOf(pair), [] as LinkCourse]))
  for (const { atMs, links } of await keptOf<{ links: Kept[] }>(em, range, 'links'))
    for (const [one, other, weight, share, lost] of links) {
      const [a, b] = [nameOf.get(one), nameOf.get(other)]
      if (a === undefined || b === undefined || lost === 1) continue
      courses.get(cursorOf(a < b ? { a, b } : { a: b, b: a }))?.push([atMs, weight, share])
    }
  return courses
}

export interface LinkTurn extends Pair {
  atMs: number
  kind: 'link-lost' | 'link-found'
}

/** So many of an overlay's newest events are looked through: pages ask every few seconds. */
export const EVENTS_LOOKED_AT = 20_000

/** When links were last lost or found up to a moment, by the names of their ends as they are seen. */
export async function lastTurns(
  em: EntityManager,
  { overlayId, toMs }: Omit<KeptRange, 'last'>,
  sight: Sight,
): Promise<Map<string, LinkTurn>> {
  const turns = await query<LinkTurn>(
    em,
    `select distinct on (a, b) pair->>0 as a, pair->>1 as b, ${epochMs('at')} as "atMs", kind
     from (select id, at, kind, data from overlay_events where overlay_id = ? and at <= ?
       order by at desc limit ?) event, jsonb_array_elements(data->'links') pair
     where kind in ('link-lost', 'link-found') and jsonb_typeof(data->'links') = 'array'
     order by a, b, at desc, id desc`,
    [overlayId, new Date(toMs), EVENTS_LOOKED_AT],
  )
  return new Map(
    turns.map((turn) => {
      const [one, other] = [sight.named(turn.a), sight.named(turn.b)]
      const [a, b] = one < other ? [one, other] : [other, one]
      return [cursorOf({ a, b }), { ...turn, a, b }]
    }),
  )
}

/** Since when a link has been named: found then, or seen in the oldest snapshot looked at since it was last lost. */
export function sinceOf(turn: LinkTurn | undefined, course: LinkCourse): WeakLink['since'] {
  if (turn?.kind === 'link-found') return { at: new Date(turn.atMs).toISOString(), atLeast: false }
  const first = course.find(([atMs]) => atMs > (turn?.atMs ?? 0))
  return first ? { at: new Date(first[0]).toISOString(), atLeast: true } : null
}
