import { DirectedGraph, UndirectedGraph } from 'graphology'
import { describe, expect, it } from 'vitest'
import {
  components,
  type Edge,
  edgesOf,
  fromEdges,
  fromGraphology,
  linkCount,
  weightedDegrees,
} from '@/lib/method/graph'
import * as graphs from '@/lib/method/graphs'
import { createRandom } from '@/lib/method/random'

describe('fromEdges', () => {
  it('lays links out in rows, both ends, targets ascending', () => {
    const graph = fromEdges(4, [
      [2, 0, 0.5],
      [1, 2],
    ])
    expect(graph).toEqual({
      nodes: 4,
      offsets: Int32Array.of(0, 1, 2, 4, 4),
      targets: Int32Array.of(2, 2, 0, 1),
      weights: Float64Array.of(0.5, 1, 0.5, 1),
    })
    expect(edgesOf(graph)).toEqual([
      [0, 2, 0.5],
      [1, 2, 1],
    ])
    expect(linkCount(graph)).toBe(2)
    expect(weightedDegrees(graph)).toEqual(Float64Array.of(0.5, 1, 1.5, 0))
    expect(components(graph)).toEqual({ count: 2, of: Int32Array.of(0, 0, 0, 1) })
  })

  it('takes a graph without nodes', () => {
    expect(components(fromEdges(0, []))).toEqual({ count: 0, of: new Int32Array(0) })
  })

  it.each<[string, number, Edge[], string]>([
    ['a self-loop', 3, [[1, 1]], 'graph: node 1 is linked to itself'],
    ['a node out of range', 3, [[0, 3]], 'graph: node 3 is not one of 0 … 2'],
    ['a node that is no index', 3, [[0.5, 1]], 'graph: node 0.5 is not one of 0 … 2'],
    ['a weight of 0', 3, [[0, 1, 0]], 'graph: weight of 0 – 1 must be positive and finite, got 0'],
    [
      'a weight that is no number',
      3,
      [[0, 1, Number.NaN]],
      'graph: weight of 0 – 1 must be positive and finite, got NaN',
    ],
    [
      'a link given both ways',
      3,
      [
        [0, 1],
        [1, 0],
      ],
      'graph: 0 – 1 is given twice',
    ],
    ['a bad count of nodes', -1, [], 'graph: nodes must be a count, got -1'],
  ])('refuses %s', (_, nodes, edges, message) => {
    expect(() => fromEdges(nodes, edges)).toThrow(new RangeError(message))
  })
})

describe('fromGraphology', () => {
  it('keeps the order of nodes and takes weight 1 where none is given', () => {
    const source = new UndirectedGraph()
    for (const name of ['tar-01', 'gul-04', 'pin-02']) source.addNode(name)
    source.addEdge('pin-02', 'tar-01', { weight: 0.25 })
    source.addEdge('gul-04', 'pin-02')
    const { graph, names } = fromGraphology(source)
    expect(names).toEqual(['tar-01', 'gul-04', 'pin-02'])
    expect(edgesOf(graph)).toEqual([
      [0, 2, 0.25],
      [1, 2, 1],
    ])
  })

  it('refuses directed links and weights that are no numbers', () => {
    const directed = new DirectedGraph()
    directed.mergeEdge('a', 'b')
    expect(() => fromGraphology(directed)).toThrow('graph: links must be undirected')
    const odd = new UndirectedGraph()
    odd.mergeEdge('a', 'b', { weight: '0.5' })
    expect(() => fromGraphology(odd)).toThrow('graph: weight of 0 – 1 must be positive and finite, got NaN')
  })
})

describe('graph builders', () => {
  const degrees = (graph: ReturnType<typeof fromEdges>) => [...weightedDegrees(graph)]
  const of = (graph: ReturnType<typeof fromEdges>) => ({
    nodes: graph.nodes,
    links: linkCount(graph),
    components: components(graph).count,
  })

  it('make what their names say', () => {
    const random = createRandom(5)
    expect(of(graphs.path(5))).toEqual({ nodes: 5, links: 4, components: 1 })
    expect(of(graphs.ring(5))).toEqual({ nodes: 5, links: 5, components: 1 })
    expect(degrees(graphs.tree(7))).toEqual([2, 3, 3, 1, 1, 1, 1])
    expect(of(graphs.complete(6))).toEqual({ nodes: 6, links: 15, components: 1 })
    expect(degrees(graphs.star(4))).toEqual([4, 1, 1, 1, 1])
    expect(of(graphs.torus(3, 5))).toEqual({ nodes: 15, links: 30, components: 1 })
    expect(new Set(degrees(graphs.torus(4, 6)))).toEqual(new Set([4]))
    expect(of(graphs.dumbbell(5, 2))).toEqual({ nodes: 10, links: 22, components: 1 })
    expect(of(graphs.preferentialAttachment(300, 3, random))).toEqual({
      nodes: 300,
      links: 6 + 296 * 3,
      components: 1,
    })
    const hub = graphs.hubOnRegular({ nodes: 220, degree: 8, hubDegree: 200 }, random)
    expect(degrees(hub)[220]).toBe(200)
    expect(linkCount(hub)).toBe(220 * 4 + 200)
  })

  it.each([
    [4, 3],
    [10, 2],
    [48, 6],
    [1000, 8],
    [2, 1],
    [1, 0],
  ])('make a connected random regular graph of %d nodes, degree %d', (nodes, degree) => {
    const graph = graphs.randomRegular(nodes, degree, createRandom(9))
    expect(new Set(degrees(graph))).toEqual(new Set([degree]))
    expect(components(graph).count).toBe(1)
  })

  it('join two clusters by exactly the links asked for, none sharing an end', () => {
    const graph = graphs.twoClusters({ perSide: 24, degree: 6, links: 5 }, createRandom('two'))
    const crossing = edgesOf(graph).filter(([a, b]) => a < 24 && b >= 24)
    expect(crossing).toHaveLength(5)
    expect(new Set(crossing.flatMap((edge) => edge.slice(0, 2))).size).toBe(10)
    expect(linkCount(graph)).toBe(24 * 6 + 5)
  })

  it('join clusters in a row by exactly the links asked for, and by no others', () => {
    const graph = graphs.clustersInRow({ perCluster: 10, degree: 4, joints: [3, 6] }, createRandom('row'))
    const joints = edgesOf(graph).flatMap(([a, b]) => {
      const clusters = [a, b].map((node) => Math.floor(node / 10))
      return clusters[0] === clusters[1] ? [] : [clusters.sort().join('-')]
    })
    expect(joints.filter((joint) => joint === '0-1')).toHaveLength(3)
    expect(joints.filter((joint) => joint === '1-2')).toHaveLength(6)
    expect(joints).toHaveLength(9)
    expect(of(graph)).toEqual({ nodes: 30, links: 3 * 20 + 9, components: 1 })
  })

  it('repeat with the seed and differ without', () => {
    const make = (seed: number) => edgesOf(graphs.preferentialAttachment(40, 2, createRandom(seed)))
    expect(make(1)).toEqual(make(1))
    expect(make(1)).not.toEqual(make(2))
  })

  it('refuse what cannot be', () => {
    const random = createRandom(1)
    expect(() => graphs.randomRegular(5, 3, random)).toThrow(RangeError)
    expect(() => graphs.randomRegular(4, 4, random)).toThrow(RangeError)
    expect(() => graphs.randomRegular(4, 1, random)).toThrow(RangeError)
    expect(() => graphs.ring(2)).toThrow(RangeError)
    expect(() => graphs.torus(2, 5)).toThrow(RangeError)
    expect(() => graphs.twoClusters({ perSide: 4, degree: 3, links: 5 }, random)).toThrow(
      'cannot choose 5 of 4',
    )
    expect(() => graphs.preferentialAttachment(3, 3, random)).toThrow(RangeError)
  })
})
