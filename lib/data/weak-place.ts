import type { z } from 'zod'
import type { Overlay } from '@/entities'
import { cursorOf } from '@/lib/collector/namings'
import type { OverlayLink, Reading } from '@/lib/data/dto'
import { headlineLambda2 } from '@/lib/face/weak-links'
import type { Call } from '@/lib/http/call'
import { lambda2Without } from '@/lib/method/cut-bounds'
import { explainSides } from '@/lib/method/labels'
import { createRandom } from '@/lib/method/random'
import { lastTurns, linkCourses, sinceOf } from './link-courses'
import { namedLinks } from './links'
import { loadMoment, momentQuerySchema } from './moments'
import { joinedNodes } from './nodes'
import { openOverlay } from './overlays'
import { memoryOf, presentReading } from './readings'
import { type Sight, sightOf } from './sight'
import { lastSchema, type WeakLink, type WeakPlace } from './weak-dto'
import { figuresOf, remarkOf, runnerUpOf, type WeakNode, whyNoSides } from './weak-figures'

export const weakQuerySchema = momentQuerySchema.extend({
  /** How far back the courses of links go. */
  last: lastSchema.default('3h'),
})
export type WeakQuery = z.output<typeof weakQuerySchema>

interface Seen {
  at: string
  reading: Reading
  nodes: readonly WeakNode[]
  /** Crossing links as disclosure allows. */
  links: readonly OverlayLink[]
}

/** Where the overlay is weakest, now or at a past moment, and what is known of the place. */
export async function getWeakPlace(call: Call, slug: string, { at, last }: WeakQuery): Promise<WeakPlace> {
  const overlay = await openOverlay(call, 'reading.read', slug)
  const sight = await sightOf(call, overlay)
  const seen =
    at === undefined
      ? await seenNow(call, overlay, sight)
      : await loadMoment(call.em, overlay.id, new Date(at), sight)
  const { reading, nodes } = seen
  const toMs = at === undefined ? call.now.getTime() : Date.parse(seen.at)
  const sided = nodes.flatMap(({ side, labels }) => (side ? [{ side, labels }] : []))
  return {
    at: seen.at,
    isNow: at === undefined,
    disclosure: overlay.disclosure,
    reading,
    withheld: whyNoSides(reading),
    remark: remarkOf(reading),
    ...figuresOf(reading, nodes),
    links: reading.sides ? await linksOf(call, seen, { overlayId: overlay.id, last, toMs }, sight) : [],
    // The overlay's own stream of chance: the same question has the same answer.
    follows: { nodes: sided.length, ...explainSides(sided, { random: createRandom(overlay.id) }) },
    runnerUp: runnerUpOf(reading),
  }
}

async function seenNow(call: Call, overlay: Overlay, sight: Sight): Promise<Seen> {
  const reading = await presentReading(call.em, overlay, call.now, sight)
  const memory = await memoryOf(call.em, overlay.id)
  const nodes = await joinedNodes(call.em, overlay, memory, sight)
  const links = await namedLinks(call.em, overlay, memory, sight)
  return { at: reading.at, reading, nodes, links: links.filter(({ crossing }) => crossing) }
}

async function linksOf(
  { em }: Call,
  { reading, nodes, links }: Seen,
  range: Parameters<typeof linkCourses>[1],
  sight: Sight,
): Promise<WeakLink[]> {
  const courses = await linkCourses(em, range, links, sight)
  const turns = await lastTurns(em, range, sight)
  const silent = new Set(nodes.filter(({ state }) => state === 'unheard').map(({ name }) => name))
  return links.map((link) => {
    const course = courses.get(cursorOf(link)) ?? []
    return {
      ...link,
      since: link.state === 'lost' ? null : sinceOf(turns.get(cursorOf(link)), course),
      without: withoutLink(link, reading, silent),
      course,
    }
  })
}

/** The bound on λ₂ without a link; null where it would claim more than is known. */
export function withoutLink(link: OverlayLink, reading: Reading, silent: ReadonlySet<string>): number | null {
  const lambda2 = headlineLambda2(reading)
  if (link.state === 'lost' || link.share === null || lambda2 === null) return null
  if (silent.has(link.a) || silent.has(link.b)) return null
  // The last link of a cut: nothing is left to hold the sides.
  if (link.crossing && reading.crossingLinks === 1) return 0
  return lambda2Without(lambda2, link.share)
}
