import { AgentSchema } from '@/entities'
import { followsOf } from '@/lib/collector/facts'
import type { Cut } from '@/lib/data/dto'
import type { Call } from '@/lib/http/call'
import { namedLinks } from './links'
import { openOverlay } from './overlays'
import { memoryOf, presentReading } from './readings'

/** The weak cut as last counted, with its crossing links as disclosure allows. */
export async function getCut(call: Call, slug: string): Promise<Cut> {
  const overlay = await openOverlay(call, 'reading.read', slug)
  const reading = await presentReading(call.em, overlay, call.now)
  const memory = await memoryOf(call.em, overlay.id)
  const { at, sides, crossingLinks, crossingWeight } = reading
  if (!sides || !memory) {
    return {
      at,
      sides: null,
      withheld:
        memory?.singleCut === false
          ? 'No sides are drawn: the weakest cuts are about equally strong.'
          : 'No sides are drawn: no cut has been counted yet.',
      crossingLinks: null,
      crossingWeight: null,
      links: [],
      follows: null,
    }
  }
  const agents = await call.em.find(AgentSchema, { overlay: overlay.id, state: 'joined' })
  const links = await namedLinks(call.em, overlay, memory)
  return {
    at,
    sides,
    withheld: null,
    crossingLinks,
    crossingWeight,
    links: links.filter(({ crossing }) => crossing),
    follows: followsOf(
      agents.map(({ id, labels }) => ({ agentId: id, labels })),
      memory,
    ),
  }
}
