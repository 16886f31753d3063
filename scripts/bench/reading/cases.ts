import { edgesOf, fromEdges, type SparseGraph } from '@/lib/method/graph'
import { clustersInRow, complete, star, torus, twoClusters } from '@/lib/method/graphs'
import { createRandom } from '@/lib/method/random'
import { algebraicConnectivity, linkShares, sweepCut } from '@/lib/method/spectrum'
import { benchGraphs } from '../graphs'

type Link = readonly [a: number, b: number]

export interface ReadingCase {
  name: string
  graph: SparseGraph
  /** One crossing link is lost: how soon the reading is right again. Null where that would part the overlay. */
  loss: Link | null
  /** Two clusters: the loss has a target of its own. */
  isTwoClusters: boolean
  /** Links whose loss makes another cut the weakest. */
  changeOfCut: readonly Link[] | null
}

/** Every graph of the bench, each with the change it goes through afterwards. */
export function readingCases(): ReadingCase[] {
  const random = (label: string) => createRandom(`reading ${label}`)
  const plain: { name: string; graph: SparseGraph }[] = [
    ...benchGraphs(),
    {
      name: 'two clusters of 18, 5 links',
      graph: twoClusters({ perSide: 18, degree: 6, links: 5 }, random('18')),
    },
    { name: 'torus 6×8', graph: torus(6, 8) },
    { name: 'complete, 20', graph: complete(20) },
    { name: 'star, 20 leaves', graph: star(20) },
  ]
  return [
    ...plain.map(({ name, graph }) => ({
      name,
      graph,
      loss: crossingLink(graph),
      isTwoClusters: /clusters|dumbbell/.test(name),
      changeOfCut: null,
    })),
    rowOfThree('three of 12 in a row, 3 and 6→1', { perCluster: 12, degree: 6, joints: [3, 6], stay: 1 }),
    rowOfThree('three of 20 in a row, 4 and 8→2', { perCluster: 20, degree: 8, joints: [4, 8], stay: 2 }),
    rowOfThree('four of 15 in a row, 3, 5 and 5→1', {
      perCluster: 15,
      degree: 6,
      joints: [3, 5, 5],
      stay: 1,
    }),
  ]
}

/** The heaviest link across the weak cut, if the overlay holds without it. */
function crossingLink(graph: SparseGraph): Link | null {
  const { fiedler, lambda2 } = algebraicConnectivity(graph)
  const side = sweepCut(graph, fiedler)?.ratio.side
  if (!side) return null
  const crossing = linkShares(graph, fiedler, lambda2)
    .filter(({ source, target }) => side[source] !== side[target])
    .sort((a, b) => b.share - a.share)
  for (const { source, target } of crossing) {
    const rest = edgesOf(graph).filter(([a, b]) => a !== source || b !== target)
    if (algebraicConnectivity(fromEdges(graph.nodes, rest)).lambda2 > 1e-6) return [source, target]
  }
  return null
}

function rowOfThree(
  name: string,
  init: { perCluster: number; degree: number; joints: readonly number[]; stay: number },
): ReadingCase {
  const { perCluster, joints, stay } = init
  const graph = clustersInRow(init, createRandom(`reading ${name}`))
  const last = joints.length - 1
  const lastJoint = edgesOf(graph).filter(([a, b]) => {
    const [from, to] = [Math.floor(a / perCluster), Math.floor(b / perCluster)].sort((p, q) => p - q)
    return from === last && to === last + 1
  })
  const changeOfCut = lastJoint.slice(stay).map(([a, b]): Link => [a, b])
  return { name, graph, loss: null, isTwoClusters: false, changeOfCut }
}
