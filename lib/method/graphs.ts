import { components, type Edge, edgesOf, fromEdges, type SparseGraph } from './graph'
import type { Random } from './random'

const range = (count: number) => Array.from({ length: count }, (_, i) => i)

export function path(nodes: number): SparseGraph {
  return fromEdges(
    nodes,
    range(Math.max(0, nodes - 1)).map((i) => [i, i + 1] as const),
  )
}

/** At least 3 nodes. */
export function ring(nodes: number): SparseGraph {
  if (nodes < 3) throw new RangeError(`ring: needs at least 3 nodes, got ${nodes}`)
  return fromEdges(
    nodes,
    range(nodes).map((i) => [i, (i + 1) % nodes] as const),
  )
}

/** Every node but the root 0 hangs on node ⌊(i − 1)/branching⌋. */
export function tree(nodes: number, branching = 2): SparseGraph {
  return fromEdges(
    nodes,
    range(Math.max(0, nodes - 1)).map((i) => [Math.floor(i / branching), i + 1] as const),
  )
}

export function complete(nodes: number): SparseGraph {
  return fromEdges(nodes, completeEdges(nodes, 0))
}

function completeEdges(nodes: number, first: number): Edge[] {
  return range(nodes).flatMap((i) => range(i).map((j) => [first + j, first + i] as const))
}

/** Node 0 in the middle. */
export function star(leaves: number): SparseGraph {
  return fromEdges(
    leaves + 1,
    range(leaves).map((i) => [0, i + 1] as const),
  )
}

/** Every node has four neighbours, across the edges too. At least 3 rows and columns. */
export function torus(rows: number, columns: number): SparseGraph {
  if (rows < 3 || columns < 3) throw new RangeError(`torus: needs 3 rows and columns, got ${rows}×${columns}`)
  const at = (row: number, column: number) => (row % rows) * columns + (column % columns)
  return fromEdges(
    rows * columns,
    range(rows).flatMap((row) =>
      range(columns).flatMap((column): Edge[] => [
        [at(row, column), at(row, column + 1)],
        [at(row, column), at(row + 1, column)],
      ]),
    ),
  )
}

/** Two complete graphs of `perSide` nodes, node i of one joined to node i of the other for i < bridges. */
export function dumbbell(perSide: number, bridges: number): SparseGraph {
  const links = range(bridges).map((i): Edge => [i, perSide + i])
  return fromEdges(2 * perSide, [...completeEdges(perSide, 0), ...completeEdges(perSide, perSide), ...links])
}

const ATTEMPTS = 1000

/**
 * Connected random graph, every node of the same degree, nearly uniform among them for small degrees:
 * A. Steger and N. Wormald, "Generating random regular graphs quickly", Combin. Probab. Comput. 8, 1999.
 * Throws RangeError where there is none.
 */
export function randomRegular(nodes: number, degree: number, random: Random): SparseGraph {
  if (degree < 0 || degree >= nodes || (nodes * degree) % 2 !== 0 || (degree < 2 && nodes > degree + 1))
    throw new RangeError(`randomRegular: no connected ${degree}-regular graph has ${nodes} nodes`)
  for (let attempt = 0; attempt < ATTEMPTS; attempt++) {
    const edges = pairPoints(nodes, degree, random)
    if (edges === null) continue
    const graph = fromEdges(nodes, edges)
    if (components(graph).count === 1) return graph
  }
  throw new RangeError(`randomRegular: gave up after ${ATTEMPTS} attempts; take another degree or seed`)
}

function pairPoints(nodes: number, degree: number, random: Random): Edge[] | null {
  const points = range(nodes * degree).map((i) => i % nodes)
  const linked = new Set<number>()
  const edges: Edge[] = []
  for (let failures = 0; points.length > 0; ) {
    const i = below(random, points.length)
    const j = below(random, points.length)
    const a = Math.min(points[i]!, points[j]!)
    const b = Math.max(points[i]!, points[j]!)
    if (a === b || linked.has(a * nodes + b)) {
      // Near the end no admissible pair may be left.
      if (++failures > 100 + 10 * points.length) return null
      continue
    }
    failures = 0
    linked.add(a * nodes + b)
    edges.push([a, b])
    remove(points, Math.max(i, j))
    remove(points, Math.min(i, j))
  }
  return edges
}

function remove(list: number[], at: number): void {
  const last = list.pop()!
  if (at < list.length) list[at] = last
}

function below(random: Random, limit: number): number {
  return Math.floor(random.uniform() * limit)
}

/** `count` different numbers of 0 … limit − 1, in random order. */
function sample(limit: number, count: number, random: Random): number[] {
  if (count > limit) throw new RangeError(`graphs: cannot choose ${count} of ${limit}`)
  const pool = range(limit)
  for (let i = 0; i < count; i++) {
    const j = i + below(random, limit - i)
    const swap = pool[i]!
    pool[i] = pool[j]!
    pool[j] = swap
  }
  return pool.slice(0, count)
}

/** Two random regular graphs (nodes 0 … perSide − 1 and the rest), joined by `links` links that share no end. */
export function twoClusters(
  init: { perSide: number; degree: number; links: number },
  random: Random,
): SparseGraph {
  const { perSide, degree, links } = init
  const first = edgesOf(randomRegular(perSide, degree, random))
  const second = edgesOf(randomRegular(perSide, degree, random))
  const left = sample(perSide, links, random)
  const right = sample(perSide, links, random)
  return fromEdges(2 * perSide, [
    ...first,
    ...second.map(([a, b]): Edge => [a + perSide, b + perSide]),
    ...left.map((node, i): Edge => [node, perSide + right[i]!]),
  ])
}

/** Random regular graphs of `perCluster` nodes in a row, neighbours in it joined by `joints[i]` links that share no end. */
export function clustersInRow(
  init: { perCluster: number; degree: number; joints: readonly number[] },
  random: Random,
): SparseGraph {
  const { perCluster, degree, joints } = init
  const clusters = range(joints.length + 1).flatMap((cluster) =>
    edgesOf(randomRegular(perCluster, degree, random)).map(
      ([a, b]): Edge => [a + cluster * perCluster, b + cluster * perCluster],
    ),
  )
  const links = joints.flatMap((count, joint) => {
    const left = sample(perCluster, count, random)
    const right = sample(perCluster, count, random)
    return left.map((node, i): Edge => [joint * perCluster + node, (joint + 1) * perCluster + right[i]!])
  })
  return fromEdges((joints.length + 1) * perCluster, [...clusters, ...links])
}

/** Random regular graph of `nodes` nodes with one node more, the last, linked to `hubDegree` of them. */
export function hubOnRegular(
  init: { nodes: number; degree: number; hubDegree: number },
  random: Random,
): SparseGraph {
  const edges = edgesOf(randomRegular(init.nodes, init.degree, random))
  const spokes = sample(init.nodes, init.hubDegree, random).map((node): Edge => [node, init.nodes])
  return fromEdges(init.nodes + 1, [...edges, ...spokes])
}

/**
 * A complete graph of perNode + 1 nodes, then each new node linked to `perNode` different nodes chosen by degree:
 * A.-L. Barabási and R. Albert, "Emergence of scaling in random networks", Science 286, 1999.
 */
export function preferentialAttachment(nodes: number, perNode: number, random: Random): SparseGraph {
  if (perNode < 1 || nodes <= perNode)
    throw new RangeError(`preferentialAttachment: needs more than ${perNode} nodes, got ${nodes}`)
  const edges = completeEdges(perNode + 1, 0)
  const ends: number[] = []
  for (const [a, b] of edges) ends.push(a, b)
  for (let node = perNode + 1; node < nodes; node++) {
    const chosen = new Set<number>()
    while (chosen.size < perNode) chosen.add(ends[below(random, ends.length)]!)
    for (const other of chosen) {
      edges.push([other, node])
      ends.push(other, node)
    }
  }
  return fromEdges(nodes, edges)
}
