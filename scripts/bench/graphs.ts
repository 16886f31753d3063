import { UndirectedGraph } from 'graphology'
import { florentineFamilies, karateClub } from 'graphology-generators/social'
import { fromGraphology, type SparseGraph } from '@/lib/method/graph'
import {
  dumbbell,
  hubOnRegular,
  preferentialAttachment,
  randomRegular,
  ring,
  tree,
  twoClusters,
} from '@/lib/method/graphs'
import { createRandom } from '@/lib/method/random'

/** The graphs every bench of readings runs on: easy, near-degenerate, hubs and heavy tails. */
export function benchGraphs(): { name: string; graph: SparseGraph }[] {
  const random = (label: string) => createRandom(`bench ${label}`)
  return [
    { name: "Zachary's karate club, 34", graph: fromGraphology(karateClub(UndirectedGraph)).graph },
    { name: 'Florentine families, 15', graph: fromGraphology(florentineFamilies(UndirectedGraph)).graph },
    { name: 'dumbbell 2×K10, 5 bridges', graph: dumbbell(10, 5) },
    {
      name: 'two clusters of 24, 3 links',
      graph: twoClusters({ perSide: 24, degree: 6, links: 3 }, random('3')),
    },
    {
      name: 'two clusters of 60, 8 links',
      graph: twoClusters({ perSide: 60, degree: 8, links: 8 }, random('8')),
    },
    { name: 'random 8-regular, 100', graph: randomRegular(100, 8, random('regular')) },
    {
      name: 'hub of degree 200 on 4-regular',
      graph: hubOnRegular({ nodes: 200, degree: 4, hubDegree: 200 }, random('hub')),
    },
    { name: 'preferential attachment, 300', graph: preferentialAttachment(300, 2, random('tail')) },
    { name: 'binary tree, 31', graph: tree(31) },
    { name: 'ring, 24', graph: ring(24) },
  ]
}
