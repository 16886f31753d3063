import type { ReinforcementAsked } from '@/lib/data/reinforcement-dto'
import { edgesOf, linkCount } from '@/lib/method/graph'
import type { Disclosure } from '@/lib/method/orders'
import {
  type FirstOrderLink,
  type GreedyInit,
  type PairRules,
  reinforceByValues,
} from '@/lib/method/reinforce'
import type { KnownOverlay } from './known'
import type { Nothing } from './words'

/** Larger ones are advised by first order: choosing exactly would take minutes. */
export const EXACT_MOST_NODES = 3_000
export const EXACT_MOST_LINKS = 40_000
/** In named overlays values come with three decimals. */
const FINE_STEP = 0.001
/** Elsewhere nodes only say on which side they lie: their value may be any. */
const SIDE_STEP = Number.POSITIVE_INFINITY
const LEAST_NODES = 3

export interface AdviseInput {
  known: KnownOverlay
  disclosure: Disclosure
  reading: {
    /** Of what `known` is of: the core where there is one. */
    lambda2: number | null
    lambda3AtMost: number | null
    level: 'firm' | 'weak' | 'split' | null
    data: 'fresh' | 'settling' | 'unheard'
    singleCut: boolean | null
  }
  asked: Pick<ReinforcementAsked, 'links' | 'between' | 'mostDegree'>
  /** By node, whether it may get a link; null for all. */
  mayLink: readonly boolean[] | null
}

export type Advice =
  | { kind: 'nothing'; nothing: Nothing }
  /** To be worked out in the thread. */
  | { kind: 'exact'; init: GreedyInit }
  | { kind: 'first-order'; links: FirstOrderLink[]; lambda2: number; tooLarge: boolean }

/** How the question can be answered, from what is known; what is quick is answered at once. */
export function advise({ known, disclosure, reading, asked, mayLink }: AdviseInput): Advice {
  const { nodes, graph, meanWeight: weight } = known
  if (reading.data === 'unheard') return nothing('unheard')
  if (nodes.length < LEAST_NODES) return nothing(nodes.length === 0 ? 'no-reading' : 'too-small')
  const between = asked.between ?? null
  const rules: PairRules = {
    mayLink,
    groups: between === null ? null : nodes.map(({ labels }) => labels[between] ?? null),
    mostDegree: asked.mostDegree ?? null,
  }
  const { links } = asked
  const small = nodes.length <= EXACT_MOST_NODES && linkCount(graph) <= EXACT_MOST_LINKS
  if (disclosure === 'named' && linkCount(graph) > 0 && small)
    return { kind: 'exact', init: { links, weight, rules } }
  if (reading.level === 'split') return nothing('split')
  if (reading.lambda2 === null) return nothing('no-reading')
  if (reading.singleCut === false) return nothing('no-single-cut')
  const values = nodes.map(({ value }) => value)
  if (values.filter((value) => value !== null).length * 2 < nodes.length) return nothing('few-values')
  const found = reinforceByValues({
    ...{ values, rules, links, weight },
    counted: nodes.length,
    step: disclosure === 'named' ? FINE_STEP : SIDE_STEP,
    lambda2: reading.lambda2,
    lambda3AtMost: reading.lambda3AtMost,
    degrees: nodes.map(({ degree }) => degree),
    linked: edgesOf(graph).map(([a, b]) => [a, b] as const),
  })
  if (found.length === 0) return nothing('no-pair')
  return {
    kind: 'first-order',
    links: found,
    lambda2: reading.lambda2,
    tooLarge: disclosure === 'named' && !small,
  }
}

function nothing(reason: Nothing): Advice {
  return { kind: 'nothing', nothing: reason }
}
