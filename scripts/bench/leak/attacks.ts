import { DEGREE_RENEWED_MS } from '@/lib/method/node/facts'
import type { Disclosure } from '@/lib/method/orders'
import type { Told } from './looks'
import { allPairs, PairScores } from './pairs'

/** Pairs whose told values move together from look to look. */
export function scoreByCovariance(nodes: number, told: readonly Told[]): PairScores {
  const scores = new PairScores(nodes)
  const steps = Array.from({ length: nodes }, (_, node) =>
    Float64Array.from(told.slice(1), ({ values }, index) => values[node]! - told[index]!.values[node]!),
  )
  const sizes = steps.map((one) => Math.sqrt(product(one, one)))
  for (const [a, b] of allPairs(nodes)) {
    const size = sizes[a]! * sizes[b]!
    scores.add(a, b, size > 0 ? product(steps[a]!, steps[b]!) / size : -1)
  }
  return scores
}

function product(one: Float64Array, other: Float64Array): number {
  let sum = 0
  for (let at = 0; at < one.length; at++) sum += one[at]! * other[at]!
  return sum
}

/** Pairs whose told values lie near each other. */
export function scoreByNearness(nodes: number, told: readonly Told[]): PairScores {
  const scores = new PairScores(nodes)
  const means = meansOf(nodes, told)
  for (const [a, b] of allPairs(nodes)) scores.add(a, b, -Math.abs(means[a]! - means[b]!))
  return scores
}

function meansOf(nodes: number, told: readonly Told[]): Float64Array {
  const means = new Float64Array(nodes)
  for (const { values } of told)
    for (let node = 0; node < nodes; node++) means[node] = means[node]! + values[node]!
  return means.map((sum) => sum / Math.max(1, told.length))
}

/** Pairs that are told to be on one side, look after look. */
export function scoreByAgreement(nodes: number, looks: readonly Float32Array[]): PairScores {
  const scores = new PairScores(nodes)
  for (const values of looks)
    for (const [a, b] of allPairs(nodes)) {
      const score = values[a]! * values[b]!
      if (score !== 0) scores.add(a, b, score)
    }
  return scores
}

/** Which side each node was mostly said to be on: below 0, above 0, or 0 where it never said. */
export function toldSides(nodes: number, told: readonly Told[]): number[] {
  return [...meansOf(nodes, told)].map(Math.sign)
}

/**
 * Pairs whose told degrees step together as a link comes or goes. When one does is known to the interval by what all links come to, and
 * up or down with it; both its ends tell of it when their degrees are renewed. The fewer nodes step after it, the surer each pair of them.
 */
export function scoreBySteps(nodes: number, told: readonly Told[], disclosure: Disclosure): PairScores {
  const scores = new PairScores(nodes)
  const renewedMs = disclosure === 'named' ? 0 : DEGREE_RENEWED_MS
  const steps = stepsOf(nodes, told)
  for (const event of eventsOf(told)) {
    // A look before: a degree said and the count of all links are not of the same moment.
    const within = steps.filter(
      ({ up, atMs }) =>
        up === event.up &&
        atMs >= event.atMs - event.slackMs &&
        atMs <= event.atMs + renewedMs + event.slackMs,
    )
    const ends = [...new Set(within.map(({ node }) => node))]
    const pairs = (ends.length * (ends.length - 1)) / 2
    for (const [a, b] of allPairs(ends.length)) scores.add(ends[a]!, ends[b]!, event.links / pairs)
  }
  return scores
}

interface Step {
  node: number
  atMs: number
  up: boolean
}

function stepsOf(nodes: number, told: readonly Told[]): Step[] {
  const steps: Step[] = []
  for (let node = 0; node < nodes; node++)
    for (let at = 1; at < told.length; at++) {
      const [before, now] = [told[at - 1]!.degrees[node]!, told[at]!.degrees[node]!]
      if (before > 0 && now > 0 && before !== now)
        steps.push({ node, atMs: told[at]!.atMs, up: now > before })
    }
  return steps
}

/** When the count of all links changed, by how many, while the same agents took part. */
function eventsOf(told: readonly Told[]): { atMs: number; up: boolean; links: number; slackMs: number }[] {
  return told.slice(1).flatMap((now, index) => {
    const before = told[index]!
    if (now.agents !== before.agents || now.linkEnds === before.linkEnds) return []
    const change = now.linkEnds - before.linkEnds
    const slackMs = 3 * (now.atMs - before.atMs)
    return [{ atMs: now.atMs, up: change > 0, links: Math.abs(change) / 2, slackMs }]
  })
}
