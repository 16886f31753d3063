import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { UndirectedGraph } from 'graphology'
import { karateClub } from 'graphology-generators/social'
import { fromEdges, fromGraphology, type SparseGraph } from '@/lib/method/graph'
import { clustersInRow, preferentialAttachment, randomRegular, torus, twoClusters } from '@/lib/method/graphs'
import { createRandom, type Random } from '@/lib/method/random'

export interface Topology {
  name: string
  graph: SparseGraph
  /** Label of each node: offices, sites, clusters. */
  labels: readonly number[]
}

export interface Drain {
  what: '1 %' | '3 %' | '10 %' | 'label'
  nodes: number[]
}

const SHARES = { '1 %': 0.01, '3 %': 0.03, '10 %': 0.1 } as const

export function topologies(): Topology[] {
  const random = (label: string) => createRandom(`rehearsal ${label}`)
  const blocks = (nodes: number, each: number) =>
    Array.from({ length: nodes }, (_, node) => Math.floor(node / each))
  const inTurn = (nodes: number, count: number) => Array.from({ length: nodes }, (_, node) => node % count)
  return [
    harbourline(),
    {
      name: 'two clusters of 24, 5 links',
      graph: twoClusters({ perSide: 24, degree: 6, links: 5 }, random('two')),
      labels: blocks(48, 12),
    },
    {
      name: 'four of 20 in a row, 4, 6, 3',
      graph: clustersInRow({ perCluster: 20, degree: 6, joints: [4, 6, 3] }, random('row')),
      labels: blocks(80, 20),
    },
    {
      name: 'random 8-regular, 100',
      graph: randomRegular(100, 8, random('regular')),
      labels: inTurn(100, 5),
    },
    {
      name: 'preferential attachment, 100',
      graph: preferentialAttachment(100, 3, random('tail')),
      labels: inTurn(100, 5),
    },
    { name: 'torus 8×9', graph: torus(8, 9), labels: blocks(72, 18) },
    {
      name: "Zachary's karate club, 34",
      graph: fromGraphology(karateClub(UndirectedGraph)).graph,
      labels: inTurn(34, 4),
    },
    {
      name: 'random 4-regular, 60',
      graph: randomRegular(60, 4, random('sparse')),
      labels: inTurn(60, 6),
    },
  ]
}

/** The demo's overlay, with its harbours as labels. */
export function harbourline(): Topology {
  const rows = (name: string) =>
    readFileSync(join(import.meta.dirname, '../../../examples/harbourline', name), 'utf8')
      .trim()
      .split('\n')
      .slice(1)
      .map((line) => line.split(','))
  const nodes = rows('nodes.csv')
  const index = new Map(nodes.map(([name], at) => [name, at]))
  const harbours = [...new Set(nodes.map(([, harbour]) => harbour))]
  const edges = rows('edges.csv').map(
    ([a, b, weight]) => [index.get(a) ?? -1, index.get(b) ?? -1, Number(weight)] as const,
  )
  return {
    name: 'Harbourline, 36',
    graph: fromEdges(nodes.length, edges),
    labels: nodes.map(([, harbour]) => harbours.indexOf(harbour)),
  }
}

/** At least one node each; the label is one of the topology's, by turns. */
export function drainsOf({ graph, labels }: Topology, random: Random): Drain[] {
  const shares = Object.entries(SHARES).map(([what, share]): Drain => {
    const nodes = sampleOf(graph.nodes, Math.max(1, Math.round(share * graph.nodes)), random)
    return { what: what === '1 %' || what === '3 %' ? what : '10 %', nodes }
  })
  const label = Math.floor(random.uniform() * (Math.max(...labels) + 1))
  const labelled = labels.flatMap((each, node) => (each === label ? [node] : []))
  return [...shares, { what: 'label', nodes: labelled }]
}

function sampleOf(limit: number, count: number, random: Random): number[] {
  const pool = Array.from({ length: limit }, (_, node) => node)
  for (let i = 0; i < count; i++) {
    const j = i + Math.floor(random.uniform() * (limit - i))
    const swap = pool[i]!
    pool[i] = pool[j]!
    pool[j] = swap
  }
  return pool.slice(0, count).sort((a, b) => a - b)
}
