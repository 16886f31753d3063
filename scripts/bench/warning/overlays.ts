import type { SparseGraph } from '@/lib/method/graph'
import { dumbbell, preferentialAttachment, randomRegular, twoClusters } from '@/lib/method/graphs'
import { createRandom } from '@/lib/method/random'

/** Two clusters with so many links between them, that thin one by one. */
export interface ThinningOverlay {
  name: string
  graph: SparseGraph
  /** Nodes below this number are the one cluster. */
  firstOfOther: number
}

const random = (label: string) => createRandom(`warning ${label}`)

const clusters = (perSide: number, degree: number, links: number): ThinningOverlay => ({
  name: `two clusters of ${perSide}, ${links} links`,
  graph: twoClusters({ perSide, degree, links }, random(`${perSide} ${links}`)),
  firstOfOther: perSide,
})

export function thinningOverlays(): ThinningOverlay[] {
  return [
    { name: 'dumbbell 2×K10, 6 bridges', graph: dumbbell(10, 6), firstOfOther: 10 },
    clusters(12, 4, 6),
    clusters(18, 5, 9),
    clusters(24, 6, 8),
    clusters(24, 6, 12),
  ]
}

/** Those of healthy life: two with a weak place, and two without. Small, so that hours of walkers can be afforded. */
export function healthyOverlays(): { name: string; graph: SparseGraph }[] {
  const [dumb, small] = thinningOverlays()
  return [
    { name: dumb!.name, graph: dumb!.graph },
    { name: small!.name, graph: small!.graph },
    { name: 'random 6-regular, 24', graph: randomRegular(24, 6, random('regular')) },
    { name: 'preferential attachment, 24', graph: preferentialAttachment(24, 3, random('tail')) },
  ]
}
