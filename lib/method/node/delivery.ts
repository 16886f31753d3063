import type { WeightMode } from '../orders'

/** A frame is delivered in time when its acknowledgement is back within the longer of these. */
export const DEADLINE_MS = 2_000
export const DEADLINE_TICKS = 8
/** The share of frames delivered in time is averaged over this time, exponentially. */
export const SMOOTHING_MS = 15_000
/** Delivered weights are said in these steps; never 0, which says that the link is down. */
export const WEIGHT_STEP = 0.05
/** A said weight stays until the measured one is this far from it: both ends' noise must not make it flicker. */
export const WEIGHT_HYSTERESIS = 0.1
/** From here on a link counts as one that delivers everything. */
export const WHOLE_SHARE = 0.975
/**
 * At most one change of a said weight in this time, save for down: while both ends' weights are on their way they
 * disagree, and a third of links disagreeing 2:1 costs 25 % of the reading.
 */
export const CHANGE_MS = 3_000
/** A frame stands for the time since the one before it, but no more than this. */
const MOST_SPACING_MS = 1_500
/** Frames whose acknowledgement may still come are remembered up to this number. */
const MOST_PENDING = 512

interface Pending {
  number: number
  sentAtMs: number
  /** Its part in the average. */
  part: number
  /** Counted already, as late; or forgiven, because the link was down. */
  isOver: boolean
}

/** What one end knows of how a link delivers its frames. Pure bookkeeping: no clock, no chance. */
export interface Delivery {
  /** Share of frames acknowledged within the deadline, averaged; 1 until something else is known. */
  share: number
  /** That share in steps, with hysteresis. */
  judged: number
  /** The own weight as it is said. */
  said: number
  changedAtMs: number
  lastSentAtMs: number | null
  /** The last frame's part in the average. */
  lastPart: number
  pending: Pending[]
  /** Frames the other end had taken in when it last said so. */
  heardFrames: number | null
}

export function openDelivery(): Delivery {
  return {
    share: 1,
    judged: 1,
    said: 1,
    changedAtMs: Number.NEGATIVE_INFINITY,
    lastSentAtMs: null,
    lastPart: 0,
    pending: [],
    heardFrames: null,
  }
}

export function deadlineMs(tickMs: number): number {
  return Math.max(DEADLINE_MS, DEADLINE_TICKS * tickMs)
}

/**
 * A frame leaves. `isDown`: nothing has been acknowledged for so long that the link is out. A link that is down is
 * no weak link: it weighs 0 for as long as that lasts, and what it was sent then is not held against it afterwards
 * (a neighbour that was stopped for a while is back at its weight at once).
 */
export function noteSent(delivery: Delivery, number: number, nowMs: number, isDown: boolean): void {
  const { pending } = delivery
  const spacingMs = Math.min(Math.max(0, nowMs - (delivery.lastSentAtMs ?? nowMs)), MOST_SPACING_MS)
  delivery.lastSentAtMs = nowMs
  if (isDown) for (const frame of pending) frame.isOver = true
  delivery.lastPart = -Math.expm1(-spacingMs / SMOOTHING_MS)
  pending.push({ number, sentAtMs: nowMs, part: delivery.lastPart, isOver: isDown })
  if (pending.length <= MOST_PENDING) return
  pending.shift()
  delivery.heardFrames = null
}

/** Counts what is overdue. */
export function noteTime(delivery: Delivery, nowMs: number, tickMs: number): void {
  const limitMs = deadlineMs(tickMs)
  for (const frame of delivery.pending) {
    if (nowMs - frame.sentAtMs <= limitMs) break
    if (!frame.isOver) delivery.share -= frame.part * delivery.share
    frame.isOver = true
  }
}

/**
 * The other end says what it has heard. Acknowledgements are cumulative, so that a lost one does no harm; how many of
 * the acknowledged frames were lost on the way shows in its count of frames (null from version 1, which has none).
 */
export function noteHeard(
  delivery: Delivery,
  { heardNumber, heardFrames }: { heardNumber: number; heardFrames: number | null },
  nowMs: number,
  tickMs: number,
): void {
  noteTime(delivery, nowMs, tickMs)
  const until = delivery.pending.findIndex(({ number }) => number > heardNumber)
  const answered = delivery.pending.splice(0, until < 0 ? delivery.pending.length : until)
  const before = delivery.heardFrames
  delivery.heardFrames = heardFrames
  const isCounted = before !== null && heardFrames !== null && heardFrames >= before
  const arrived = isCounted ? heardFrames - before : answered.length
  const delivered = answered.length === 0 ? 1 : Math.min(1, arrived / answered.length)
  for (const { isOver, part } of answered) if (!isOver) delivery.share += part * (delivered - delivery.share)
  // Overtaken frames that count only now were held to be lost.
  const overtaken = Math.max(0, arrived - answered.length)
  delivery.share = Math.min(1, delivery.share + overtaken * delivery.lastPart)
}

/** This process stood still: what waited unread meanwhile is not late. */
export function forgive(delivery: Delivery, excessMs: number): void {
  if (excessMs <= 0) return
  for (const frame of delivery.pending) frame.sentAtMs += excessMs
  if (delivery.lastSentAtMs !== null) delivery.lastSentAtMs += excessMs
}

/** The own weight to be said now. `view` is the node's own, 0 (down) to 1, and is followed as it is. */
export function sayWeight(delivery: Delivery, view: number, mode: WeightMode, nowMs: number): number {
  if (mode === 'unit') return 1
  const { share, judged } = delivery
  if (share >= WHOLE_SHARE) delivery.judged = 1
  else if (Math.abs(share - judged) >= WEIGHT_HYSTERESIS) delivery.judged = inSteps(share)
  const wanted = Math.min(delivery.judged, view)
  const mayChange = wanted === 0 || nowMs - delivery.changedAtMs >= CHANGE_MS
  if (wanted !== delivery.said && mayChange) {
    delivery.said = wanted
    delivery.changedAtMs = nowMs
  }
  return delivery.said
}

function inSteps(share: number): number {
  const steps = Math.round(1 / WEIGHT_STEP)
  return Math.max(1, Math.round(share * steps)) / steps
}
