import { AgentSchema } from '@/entities'
import { followsOf } from '@/lib/collector/facts'
import { labelFollowed } from '@/lib/collector/follows'
import type { Cut, OverlayLink, Reading } from '@/lib/data/dto'
import type { Call } from '@/lib/http/call'
import { namedLinks } from './links'
import { loadMoment, type MomentQuery, type PastMoment } from './moments'
import { openOverlay } from './overlays'
import { memoryOf, presentReading } from './readings'
import { sightOf } from './sight'

/** The weak cut as last counted, or as it was at a past moment, with its crossing links as disclosure allows. */
export async function getCut(call: Call, slug: string, { at }: MomentQuery = {}): Promise<Cut> {
  const overlay = await openOverlay(call, 'reading.read', slug)
  const sight = await sightOf(call, overlay)
  if (at !== undefined) return cutThen(await loadMoment(call.em, overlay.id, new Date(at), sight))
  const reading = await presentReading(call.em, overlay, call.now, sight)
  const memory = await memoryOf(call.em, overlay.id)
  if (!reading.sides || !memory) return noCut(reading.at, memory?.singleCut === false)
  const agents = await call.em.find(AgentSchema, { overlay: overlay.id, state: 'joined' })
  const links = await namedLinks(call.em, overlay, memory, sight)
  return cutOf(
    reading,
    links.filter(({ crossing }) => crossing),
    followsOf(
      agents.map(({ id, labels }) => ({ agentId: id, labels: sight.labelsOf({ agentId: id, labels }) })),
      memory,
    ),
  )
}

function cutThen({ at, reading, nodes, links }: PastMoment): Cut {
  if (!reading.sides) return noCut(at, reading.singleCut === false)
  return cutOf({ ...reading, at }, links, labelFollowed(nodes))
}

function noCut(at: string, isShared: boolean): Cut {
  return {
    at,
    sides: null,
    withheld: isShared
      ? 'No sides are drawn: the weakest cuts are about equally strong.'
      : 'No sides are drawn: no cut has been counted yet.',
    crossingLinks: null,
    crossingWeight: null,
    links: [],
    follows: null,
  }
}

function cutOf(
  { at, sides, crossingLinks, crossingWeight }: Reading,
  links: readonly OverlayLink[],
  follows: Cut['follows'],
): Cut {
  return { at, sides, withheld: null, crossingLinks, crossingWeight, links: [...links], follows }
}
