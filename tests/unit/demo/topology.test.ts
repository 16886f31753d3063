import { readFileSync } from 'node:fs'
import { expect, test } from 'vitest'
import { components, type Edge, fromEdges, weightedDegrees } from '@/lib/method/graph'
import { algebraicConnectivity, linkShares, sweepCut } from '@/lib/method/spectrum'
import { parseEdgeList, parseNodeList } from '@/lib/topology'
import { edgesCsv, harbourline, isFar, LAST_LINKS, nodesCsv, OFFICES } from '@/scripts/demo/topology'

const scenario = harbourline()
const indexOf = new Map(scenario.nodes.map(({ name }, index) => [name, index]))

function graphOf(links: readonly { a: string; b: string; weight?: number }[]) {
  const edges = links.map(({ a, b, weight = 1 }): Edge => [indexOf.get(a)!, indexOf.get(b)!, weight])
  return fromEdges(scenario.nodes.length, edges)
}

function thinned() {
  return graphOf([...scenario.links.filter(({ across }) => !across), ...LAST_LINKS])
}

test('four offices have nine nodes each and 112 links in all, 20 of them across', () => {
  const count = (office: string) => scenario.nodes.filter((node) => node.office === office).length
  expect(OFFICES.map(count)).toEqual([9, 9, 9, 9])
  expect(scenario.nodes[0]?.name).toBe('tar-01')
  expect(scenario.nodes[35]?.name).toBe('eel-09')
  expect(scenario.links).toHaveLength(112)
  expect(scenario.links.filter(({ across }) => across)).toHaveLength(20)
})

test('every node has at least three links, with all links and after the thinning', () => {
  expect(Math.min(...weightedDegrees(graphOf(scenario.links)))).toBeGreaterThanOrEqual(5)
  expect(Math.min(...weightedDegrees(thinned()))).toBeGreaterThanOrEqual(3)
  expect(components(thinned()).count).toBe(1)
})

test('with all links up no single cut is the weakest', () => {
  const { lambda2, lambda3 } = algebraicConnectivity(graphOf(scenario.links))
  expect(lambda2).toBeCloseTo(2.008, 3)
  expect(lambda3! / lambda2).toBeLessThan(1.1)
})

test('after the thinning the weak cut parts the offices and hangs on the last three links', () => {
  const graph = thinned()
  const { lambda2, lambda3, fiedler } = algebraicConnectivity(graph)
  expect(lambda2).toBeCloseTo(0.2185, 4)
  expect(lambda3! / lambda2).toBeGreaterThan(4)
  const cut = sweepCut(graph, fiedler)!.ratio
  expect(cut.links).toBe(3)
  expect(cut.weight).toBeCloseTo(2.46, 10)
  const far = Uint8Array.from(scenario.nodes, (node) => (isFar(node) ? 1 : 0))
  const near = far.map((side) => 1 - side)
  expect([far.join(''), near.join('')]).toContain(cut.side.join(''))
})

test('after the thinning the last three links carry more of λ₂ than all others together', () => {
  const graph = thinned()
  const { lambda2, fiedler } = algebraicConnectivity(graph)
  const isLast = new Set(LAST_LINKS.map(({ a, b }) => [indexOf.get(a), indexOf.get(b)].sort().join(' ')))
  const shares = linkShares(graph, fiedler, lambda2)
  const last = shares.filter(({ source, target }) => isLast.has([source, target].sort().join(' ')))
  expect(last).toHaveLength(3)
  expect(last.reduce((sum, { share }) => sum + share, 0)).toBeGreaterThan(0.5)
  expect(shares.reduce((sum, { share }) => sum + share, 0)).toBeCloseTo(1, 9)
})

test('no label but the harbour follows the sides', () => {
  const values = (key: string, far: boolean) =>
    new Set(scenario.nodes.filter((node) => isFar(node) === far).map(({ labels }) => labels[key]))
  for (const key of ['role', 'power']) expect(values(key, true)).toEqual(values(key, false))
  expect([...values('harbour', true)].some((value) => values('harbour', false).has(value))).toBe(false)
})

test('the example files are this scenario; after a change write them with scripts/demo/write-examples.ts', () => {
  const read = (name: string) =>
    readFileSync(new URL(`../../../examples/harbourline/${name}`, import.meta.url), 'utf8')
  expect(read('edges.csv')).toBe(edgesCsv(scenario))
  expect(read('nodes.csv')).toBe(nodesCsv(scenario))
  const edges = parseEdgeList(read('edges.csv'))
  const nodes = parseNodeList(read('nodes.csv'))
  expect(edges.ok && edges.graph.size).toBe(112)
  expect(nodes.ok && nodes.nodes.get('pin-02')).toEqual({ harbour: 'Pinnet Bay', role: 'berths', power: 'b' })
})
