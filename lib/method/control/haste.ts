import type { Pace } from '../pace'
import { SUMS_SCALE } from '../report'
import { GROWN_RATIO } from './settling'
import { heardAgents, type Snapshot } from './snapshot'
import type { ControlSettings, ControlState } from './state'

/** While a reading is on its way, agents report and are answered this many times as often: the control loop can then bear as much more ω. */
export const HASTE = 4
/** But no more often than this: a report there and back, and a few ticks, have to fit in. */
export const HASTY_AT_LEAST_MS = 500
/** Nor with more reports per second from one overlay than this: beyond it haste costs the collector more than it brings. */
export const MOST_REPORTS_PER_SECOND = 200
/** Haste lasts this many of the pace's intervals after a cold start or a change, and on while the reading is settling. */
export const HASTY_INTERVALS = 10
export const SETTLED_FOR_INTERVALS = 3
export const MOST_HASTY_INTERVALS = 60

/** Report interval of an overlay in haste. */
export function hastyIntervalMs({ intervalMs }: Pace, agents: number): number {
  const affordable = (1000 * agents) / MOST_REPORTS_PER_SECOND
  return Math.min(intervalMs, Math.round(Math.max(intervalMs / HASTE, HASTY_AT_LEAST_MS, affordable)))
}

/** The pace as the orders now have it. */
export function paceNow(
  { intervalMs }: Pick<ControlState, 'intervalMs'>,
  { pace }: Pick<ControlSettings, 'pace'>,
): Pace {
  return { tickMs: pace.tickMs, intervalMs: intervalMs ?? pace.intervalMs }
}

/** Whether the next orders are to be in haste. */
export function isHasty(
  control: Pick<ControlState, 'colonies' | 'coldSinceMs' | 'changedAtMs' | 'unsettledAtMs' | 'isHasty'>,
  { intervalMs }: Pace,
  attached: number,
  atMs: number,
): boolean {
  const { coldSinceMs, changedAtMs = coldSinceMs, unsettledAtMs = coldSinceMs } = control
  // Agents that have no links yet may be a long time without.
  if (control.colonies.length === 0) return attached >= 2
  const since = (atMs - Math.max(coldSinceMs, changedAtMs)) / intervalMs
  if (since < HASTY_INTERVALS) return true
  // Once over it does not begin again without a new cause.
  if (!control.isHasty || since >= MOST_HASTY_INTERVALS) return false
  return (atMs - unsettledAtMs) / intervalMs < SETTLED_FOR_INTERVALS
}

/** So long after a change the colony seeded at it should have grown; where it has not, more ω is worth its price. */
export const WAIT_INTERVALS = 8
const COLD_INTERVALS = 25
/** And where λ₂ is no smaller than this share of the mean weighted degree, what ω stirs up is no more than noise. */
export const STURDY_SHARE = 0.25

/**
 * Whether ω may rise to what the loop bears in haste. The rise itself stirs the walkers up (links fill with more of them), by 10 % for some
 * seconds, which is more than the loss of a link does where one cut is clearly weakest: such a reading is right before that. Without
 * the rise a complete graph of 12 nodes read 20 % high for minutes after it had lost a link.
 */
export function mayRise(
  {
    coldSinceMs,
    changedAtMs,
    young,
    isHasty,
    meanWeightedDegree,
  }: Pick<ControlState, 'coldSinceMs' | 'changedAtMs' | 'young' | 'isHasty' | 'meanWeightedDegree'>,
  lambda2: number,
  { intervalMs }: Pace,
  atMs: number,
): boolean {
  if (!isHasty || changedAtMs === undefined || changedAtMs <= coldSinceMs + COLD_INTERVALS * intervalMs)
    return true
  if (lambda2 >= STURDY_SHARE * meanWeightedDegree) return true
  const last = young?.ratios[young.ratios.length - 1]
  return atMs - changedAtMs >= WAIT_INTERVALS * intervalMs && last !== undefined && last.ratio > GROWN_RATIO
}

/** More than this share of all link weight, changed between two looks, is a change of the overlay. */
export const WEIGHT_CHANGED = 0.01

/** Whether links came, went or changed their weight since the last look. */
export function isChanged(before: Snapshot, now: Snapshot, intervalMs: number): boolean {
  if (now.round !== undefined) return isRoundChanged(before, now)
  const earlier = new Map(before.agents.map(({ agentId, last }) => [agentId, last?.report.sums]))
  let changed = 0
  let all = 0
  for (const { agentId, last } of heardAgents(now, intervalMs)) {
    const { linkEnds, linkEndWeight } = last.report.sums
    const old = earlier.get(agentId)
    if (old && old.linkEnds !== linkEnds) return true
    all += linkEndWeight
    changed += Math.abs(linkEndWeight - (old?.linkEndWeight ?? linkEndWeight))
  }
  return changed > WEIGHT_CHANGED * all && changed > SUMS_SCALE / 100
}

/**
 * By what two rounds of as many agents come to: where one has come, gone or missed a round the sums do not tell whether links did. That many
 * have come or gone is a change by itself.
 */
function isRoundChanged({ round: before }: Snapshot, { round: now }: Snapshot): boolean {
  if (!now?.isNew || !before) return false
  const [from, to] = [before.totals.head, now.totals.head]
  if (from.agents !== to.agents) return Math.abs(from.agents - to.agents) > MOST_MISSING * from.agents
  if (from.linkEnds !== to.linkEnds) return true
  const changed = Math.abs(to.linkEndWeight - from.linkEndWeight)
  return changed > WEIGHT_CHANGED * to.linkEndWeight && changed > SUMS_SCALE / 100
}

/** Fewer may have missed a round by chance. */
const MOST_MISSING = 0.05
