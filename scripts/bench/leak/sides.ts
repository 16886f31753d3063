import { type ClearCut, clearCutNow } from '@/lib/method/control/clear-cut'
import { type Edge, edgesOf, fromEdges, type SparseGraph } from '@/lib/method/graph'
import { COARSE_INTERVALS } from '@/lib/method/node/facts'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { algebraicConnectivity } from '@/lib/method/spectrum'
import { scoreByAgreement } from './attacks'
import { Churn } from './churn'
import type { DegreesInit } from './degrees'
import { pairKey } from './pairs'
import { type Share, shareOf } from './shares'

/** Told as nodes tell it: by the walkers' order alone, or always. */
export type Stand = typeof clearCutNow

/** A day of an overlay without its walkers: only the sides that nodes tell, from exact λ₂, λ₃ and Fiedler vectors. */
export function sidesTold(
  graph: SparseGraph,
  { seed, hours, lostPerHour }: DegreesInit,
  stand: Stand = clearCutNow,
): Float32Array[] {
  const random = createRandom(`leak sides ${graph.nodes} ${seed}`)
  const links = edgesOf(graph).map(([a, b]) => [a, b] as const)
  const present = new Map<string, Edge>(links.map((link) => [pairKey(link), link]))
  const churn = new Churn({ random }, { links, lostPerHour, fromMs: 0 })
  const { intervalMs } = PACES.calm
  const told: Float32Array[] = []
  let [clearCut, changed]: [ClearCut | null, boolean] = [null, true]
  let exact = { lambda2: 0, lambda3: 0 as number | null, signs: new Float32Array(graph.nodes) }
  for (let nowMs = intervalMs; nowMs <= hours * 3_600_000; nowMs += intervalMs) {
    churn.bring({
      nowMs,
      join: (a, b) => {
        present.set(pairKey([a, b]), [a, b])
        changed = true
      },
      cut: (a, b) => {
        present.delete(pairKey([a, b]))
        changed = true
      },
    })
    if (changed) exact = exactOf(fromEdges(graph.nodes, [...present.values()]), exact.signs)
    changed = false
    clearCut = stand(clearCut, {
      ...{ atMs: nowMs, lambda2: exact.lambda2 || null, lambda3AtMost: exact.lambda3 },
      ...{ aloneBy: null, settling: false, intervalMs },
    })
    if (nowMs % (COARSE_INTERVALS * intervalMs) === 0)
      told.push(clearCut?.stands ? exact.signs : new Float32Array(graph.nodes))
  }
  return told
}

function exactOf(graph: SparseGraph, before: Float32Array) {
  const { lambda2, lambda3, fiedler } = algebraicConnectivity(graph, { count: 3 })
  const overlap = fiedler.reduce((sum, value, node) => sum + value * before[node]!, 0)
  const turn = overlap < 0 ? -1 : 1
  return { lambda2, lambda3, signs: Float32Array.from(fiedler, (value) => turn * Math.sign(value)) }
}

/** @returns share of guesses that are links, and of the time in which sides were told */
export function namedBySides(
  graph: SparseGraph,
  init: DegreesInit,
  stand?: Stand,
): Share & { toldShare: number } {
  const told = sidesTold(graph, init, stand)
  const toldShare = told.filter((values) => values.some((value) => value !== 0)).length / told.length
  return { ...shareOf(graph, scoreByAgreement(graph.nodes, told)), toldShare }
}
