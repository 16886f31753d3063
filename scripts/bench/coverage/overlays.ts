import { type Edge, edgesOf, fromEdges, type SparseGraph } from '@/lib/method/graph'
import {
  clustersInRow,
  hubOnRegular,
  preferentialAttachment,
  randomRegular,
  torus,
  tree,
  twoClusters,
} from '@/lib/method/graphs'
import { createRandom, type Random } from '@/lib/method/random'

export interface Overlay {
  name: string
  graph: SparseGraph
}

/** The spread of overlays that coverage is measured on, 36 to 100 nodes; random ones differ from seed to seed. */
export function overlaysOf(seed: number): Overlay[] {
  const random = (label: string) => createRandom(`coverage ${label} ${seed}`)
  return [
    {
      name: 'two clusters of 18, 5 links',
      graph: twoClusters({ perSide: 18, degree: 6, links: 5 }, random('18')),
    },
    {
      name: 'two clusters of 30, 3 links',
      graph: twoClusters({ perSide: 30, degree: 6, links: 3 }, random('30')),
    },
    {
      name: 'three of 16 in a row, 3 and 6',
      graph: clustersInRow({ perCluster: 16, degree: 6, joints: [3, 6] }, random('row')),
    },
    { name: 'ring of four of 12, 3 links each', graph: ringOfClusters(4, 12, 3, random('ring 4')) },
    { name: 'ring of six of 10, 2 links each', graph: ringOfClusters(6, 10, 2, random('ring 6')) },
    { name: 'random 4-regular, 40', graph: randomRegular(40, 4, random('4-regular')) },
    { name: 'random 8-regular, 100', graph: randomRegular(100, 8, random('8-regular')) },
    { name: 'torus 6×8', graph: torus(6, 8) },
    { name: 'preferential attachment, 60', graph: preferentialAttachment(60, 2, random('tail')) },
    {
      name: 'hub of degree 30 on 4-regular, 51',
      graph: hubOnRegular({ nodes: 50, degree: 4, hubDegree: 30 }, random('hub')),
    },
    { name: '4-regular of 34 with 6 loose leaves', graph: withLeaves(34, 6, random('leaves')) },
    { name: 'tree of 45 with 15 more links', graph: linkedTree(45, 15, random('tree')) },
  ]
}

/** Random 4-regular clusters in a ring, neighbouring ones joined by `links` links. */
function ringOfClusters(count: number, perCluster: number, links: number, random: Random): SparseGraph {
  const joints = Array.from({ length: count - 1 }, () => links)
  const row = edgesOf(clustersInRow({ perCluster, degree: 4, joints }, random))
  const last = (count - 1) * perCluster
  const closing = Array.from({ length: links }, (_, link): Edge => [link, last + link])
  return fromEdges(count * perCluster, [...row, ...closing])
}

function withLeaves(mesh: number, leaves: number, random: Random): SparseGraph {
  const hanging = Array.from({ length: leaves }, (_, leaf): Edge => [below(random, mesh), mesh + leaf])
  return fromEdges(mesh + leaves, [...edgesOf(randomRegular(mesh, 4, random)), ...hanging])
}

/** A binary tree with a few links more; what no further link reaches hangs loose. */
function linkedTree(nodes: number, more: number, random: Random): SparseGraph {
  const edges: Edge[] = edgesOf(tree(nodes))
  const linked = new Set(edges.map(([a, b]) => `${a} ${b}`))
  while (edges.length < nodes - 1 + more) {
    const [a, b] = [below(random, nodes), below(random, nodes)].sort((p, q) => p - q) as [number, number]
    if (a === b || linked.has(`${a} ${b}`)) continue
    linked.add(`${a} ${b}`)
    edges.push([a, b])
  }
  return fromEdges(nodes, edges)
}

export const below = (random: Random, limit: number): number => Math.floor(random.uniform() * limit)
