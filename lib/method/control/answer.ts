import { AVERAGING_INTERVALS } from '../node'
import type { Pace } from '../pace'
import { hastyIntervalMs } from './haste'
import { GROWN_RATIO } from './settling'

export interface AnswerInput {
  pace: Pace
  /** Agents joined: few enough report in haste. */
  agents: number
  linkTimePerSecond: number
  lambda2: number
  /** Upper bound, or null. */
  lambda3AtMost: number | null
}

/** A change is heard of within an interval, and judged for one more. */
export const NOTICED_INTERVALS = 2
/** Averages have to forget what was before, and then be seen to stand still. */
export const FORGOTTEN_AVERAGES = 3

/** Where walking has hardly begun, or λ₂ is next to nothing. */
const MOST_GROWING_AVERAGES = 15

/**
 * How long a change of links takes to show in a fresh reading, milliseconds: to be heard of, averages to renew themselves, and a new
 * colony to grow, whose excess falls at 2ω(λ₃ − λ₂); modes within `GROWN_RATIO` of λ₂ need not be waited for. On nine
 * simulated graphs under churn it foretold 11–16 s where the median was 11.5–20.5 s.
 */
export function answersInMs({ pace, agents, ...rest }: AnswerInput): number {
  const { linkTimePerSecond, lambda2, lambda3AtMost } = rest
  const averagingMs = AVERAGING_INTERVALS * hastyIntervalMs(pace, agents)
  const least = NOTICED_INTERVALS * pace.intervalMs + FORGOTTEN_AVERAGES * averagingMs
  const speed =
    2 * linkTimePerSecond * Math.max((GROWN_RATIO - 1) * lambda2, (lambda3AtMost ?? 2 * lambda2) - lambda2)
  const growing = speed > 0 ? (1000 * Math.LN2) / speed : 0
  return Math.round(least + Math.min(growing, MOST_GROWING_AVERAGES * averagingMs))
}
