import type { NodeStory } from '@/lib/data/weak-dto'
import { formatCount } from './format'
import type { Range } from './range'

export interface Neighbour {
  name: string
  weight: number
  share: number | null
  crossing: boolean
  state: 'live' | 'lost'
}

/** The nodes at the other ends. */
export function neighboursOf({ node, links }: Pick<NodeStory, 'node' | 'links'>): Neighbour[] {
  return links.map(({ a, b, weight, share, crossing, state }) => ({
    ...{ name: a === node.name ? b : a, weight, share, crossing, state },
  }))
}

/** Why neighbours are counted and not named; null where all are. */
export function hiddenLinksText({
  disclosure,
  unnamed,
  links,
}: Omit<NodeStory, 'course' | 'incidents' | 'node'>): string | null {
  if (unnamed === 0) return null
  const further = links.length > 0 ? 'further link' : 'link'
  const are = `${formatCount(unnamed, further)} ${unnamed === 1 ? 'is' : 'are'}`
  if (disclosure === 'sealed')
    return `${are} measured and not named: this overlay is sealed. The node itself knows its neighbours.`
  if (disclosure === 'flagged')
    return `${are} not named: in a flagged overlay a link is named only when it carries much of the reading and both its ends consent.`
  return `${are} measured and not reported by name yet.`
}

/** How far apart the moments of a range are. */
export function stepMsOf({ seconds }: Range): number {
  return Math.max(60_000, (seconds * 1000) / 60)
}
