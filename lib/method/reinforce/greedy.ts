import { edgesOf, fromEdges, type SparseGraph, weightedDegrees } from '../graph'
import { algebraicConnectivity, largestEigenvalueBound, SAME_WITHIN, spectrum } from '../spectrum'
import { gainBounds, type LowEnd, quickGain } from './gain'
import { ANY_PAIR, type PairRules, Pairs } from './pairs'
import { type Shortlist, shortlist } from './shortlist'

/** Up to so many nodes all eigenpairs are at hand, and every pair's gain is known exactly at once. */
const WHOLE_UP_TO_NODES = 80
const LOW_END = 4
const SHORTLIST = 400
/** Exact evaluations per link; each is one run of Lanczos. */
const TRIES_MOST = 12
/** A pair that could bring less than this more is not tried: relative to what the best brings, or to λ₂. */
const MORE_GAIN = 1e-3
const MORE_LAMBDA2 = 1e-5
/** ‖Lv − λv‖ over λ; the value's own error goes by the square of it. */
const TOLERANCE = 1e-4

export interface GreedyInit {
  /** At most so many new links. */
  links: number
  /** Of each new link. */
  weight: number
  rules?: PairRules
  /** For tests: how many eigenpairs are held, where not all. */
  lowEnd?: number
}

export interface ExactLink {
  a: number
  b: number
  /** Exact λ₂ with this link and those before it. */
  lambda2: number
  /** No other single link in its place gives more than this. */
  othersAtMost: number
}

export interface GreedyPlan {
  /** Before any. */
  lambda2: number
  /** Null with two nodes. */
  lambda3: number | null
  links: ExactLink[]
  /** Adding k links cannot lift λ₂ over λ₂₊ₖ (interlacing: A. Brouwer and W. Haemers, "Spectra of Graphs", 2012, 2.5). */
  ceiling: number | null
  /** How many weakest cuts are equally strong, as far as looked; a rise needs as many links at least. */
  equalCuts: number
  /** Why there are fewer links than asked for, where there are. */
  ended: 'enough' | 'no-pair-left'
}

/**
 * New links one after the other, each the one that raises λ₂ most given those before: the greedy of A. Ghosh and
 * S. Boyd, "Growing well-connected graphs", CDC 2006 (from memory) goes by (vᵢ − vⱼ)², the first order; here that only
 * makes the shortlist, and λ₂ itself decides. Where λ₂ is multiple no single link raises it: then the one that
 * parts most of its eigenspace goes first. Greedy is not the best set of links, which is NP-hard to find
 * (D. Mosk-Aoyama, Oper. Res. Lett. 36, 2008; from memory).
 * Throws RangeError under two nodes, and NotConvergedError from Lanczos.
 */
export function reinforceExactly(graph: SparseGraph, init: GreedyInit): GreedyPlan {
  if (graph.nodes < 2) throw new RangeError(`reinforce: needs two nodes, got ${graph.nodes}`)
  const degrees = Array.from({ length: graph.nodes }, (_, i) => graph.offsets[i + 1]! - graph.offsets[i]!)
  const pairs = new Pairs({
    nodes: graph.nodes,
    rules: init.rules ?? ANY_PAIR,
    degrees,
    linked: edgesOf(graph).map(([a, b]) => [a, b] as const),
  })
  const first = lowEndOf(graph, init.lowEnd)
  const plan: GreedyPlan = {
    lambda2: first.values[1]!,
    lambda3: first.values[2] ?? null,
    links: [],
    ceiling: first.values[1 + init.links] ?? null,
    equalCuts: equalCutsOf(first),
    ended: 'enough',
  }
  let now = graph
  let low = first
  while (plan.links.length < init.links) {
    const link = bestLink(now, low, pairs, init)
    if (!link) return { ...plan, ended: 'no-pair-left' }
    plan.links.push(link)
    pairs.take(link.a, link.b)
    now = withLink(now, link.a, link.b, init.weight)
    if (plan.links.length < init.links) low = lowEndOf(now, init.lowEnd)
  }
  return plan
}

export function withLink(graph: SparseGraph, a: number, b: number, weight: number): SparseGraph {
  return fromEdges(graph.nodes, [...edgesOf(graph), [a, b, weight]])
}

function lowEndOf(graph: SparseGraph, most?: number): LowEnd {
  const count = most ?? (graph.nodes <= WHOLE_UP_TO_NODES ? graph.nodes : LOW_END)
  const { values, vectors } = spectrum(graph, { count: Math.min(graph.nodes, count), ...optionsFor(graph) })
  return { values, vectors, degrees: weightedDegrees(graph), largest: largestEigenvalueBound(graph) }
}

function optionsFor(graph: SparseGraph) {
  const method = graph.nodes <= WHOLE_UP_TO_NODES ? ('dense' as const) : ('lanczos' as const)
  return { method, tolerance: TOLERANCE }
}

function equalCutsOf({ values }: Pick<LowEnd, 'values'>): number {
  const lambda2 = values[1]!
  return Array.from(values)
    .slice(1)
    .filter((value) => value - lambda2 <= SAME_WITHIN * value).length
}

function bestLink(graph: SparseGraph, low: LowEnd, pairs: Pairs, { weight }: GreedyInit): ExactLink | null {
  const lambda2 = low.values[1]!
  const equal = equalCutsOf(low)
  if (equal > 1) {
    const [best] = shortlist(pairs, 1, (a, b) => squareIn(low, equal, a, b)).pairs
    return best ? { a: best.a, b: best.b, lambda2, othersAtMost: lambda2 } : null
  }
  return tryOut(
    graph,
    low,
    shortlist(pairs, SHORTLIST, (a, b) => quickGain(low, a, b, weight)),
    weight,
  )
}

/** Exact λ₂ for the most promising, until no other could bring more. */
function tryOut(
  graph: SparseGraph,
  low: LowEnd,
  { pairs, restAtMost }: Shortlist,
  weight: number,
): ExactLink | null {
  const lambda2 = low.values[1]!
  const bounded = pairs
    .map(({ a, b }) => ({ a, b, ...gainBounds(low, a, b, weight) }))
    .sort((x, y) => y.atMost - x.atMost)
  let best: { a: number; b: number; lambda2: number } | null = null
  let tried = 0
  for (const { a, b, atMost } of bounded) {
    const gained = best === null ? Number.NEGATIVE_INFINITY : best.lambda2 - lambda2
    const worthIt = Math.max(gained * (1 + MORE_GAIN), gained + lambda2 * MORE_LAMBDA2)
    if (tried >= TRIES_MOST || atMost <= worthIt) break
    tried++
    const linked = withLink(graph, a, b, weight)
    const exact = algebraicConnectivity(linked, { count: 2, ...optionsFor(linked) }).lambda2
    if (best === null || exact > best.lambda2) best = { a, b, lambda2: exact }
  }
  if (!best) return null
  const others = Math.max(restAtMost, bounded[tried]?.atMost ?? 0)
  return { ...best, othersAtMost: Math.max(best.lambda2, lambda2 + others) }
}

/** ‖projection of eᵢ − eⱼ‖² onto the eigenspace of λ₂. */
function squareIn({ vectors }: LowEnd, multiplicity: number, a: number, b: number): number {
  let sum = 0
  for (let k = 1; k <= multiplicity; k++) sum += (vectors[k]![a]! - vectors[k]![b]!) ** 2
  return sum
}
