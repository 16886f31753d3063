import { binomial } from '../binomial'
import type { ColonyOrders } from '../orders'
import type { Random } from '../random'

/** No sub-step lets more than this share of a node's walkers leave. */
export const MOST_LEAVING = 0.5
/** z̄ averages over this many report intervals, and over less while the seeding is younger. */
export const AVERAGING_INTERVALS = 4

/**
 * Walkers of one type that one agent holds; more are given up. No honest overlay comes near it; a neighbour that makes
 * walkers up would else make this agent's own frames larger than its other neighbours may take.
 */
export const MOST_HELD = 2 ** 20

/** One colony's walkers and counters at one agent. Cumulative over (incarnation, seeding). */
export interface Colony {
  orders: ColonyOrders
  x: number
  y: number
  /** Seeds still to be placed, once the agent is attached. */
  toPlaceX: number
  toPlaceY: number
  adoptedAtMs: number
  refuses: boolean
  /** Neighbours whose link is refused for this colony. */
  refusedPeers: ReadonlySet<string>
  /** Averaged occupancy difference z̄. */
  mean: number
  seeded: number
  births: number
  kills: number
  culls: number
  dropped: number
  sent: number
  received: number
  walkerTime: number
  occupancyX: number
  occupancyY: number
  linkTime: number
}

const NONE: ReadonlySet<string> = new Set()

export function openColony(orders: ColonyOrders, nowMs: number): Colony {
  return {
    orders,
    x: 0,
    y: 0,
    toPlaceX: 0,
    toPlaceY: 0,
    adoptedAtMs: nowMs,
    refuses: false,
    refusedPeers: NONE,
    mean: 0,
    seeded: 0,
    births: 0,
    kills: 0,
    culls: 0,
    dropped: 0,
    sent: 0,
    received: 0,
    walkerTime: 0,
    occupancyX: 0,
    occupancyY: 0,
    linkTime: 0,
  }
}

/** Where departing walkers may go: weights ≥ 0 and, filled by `walk`, the counts that left over each. */
export interface Exits {
  weights: Float64Array
  /** Of the weights up to and with each: the last is `totalWeight`. */
  sums: Float64Array
  totalWeight: number
  x: Float64Array
  y: Float64Array
}

export function place(colony: Colony): void {
  colony.x += colony.toPlaceX
  colony.y += colony.toPlaceY
  colony.seeded += colony.toPlaceX + colony.toPlaceY
  colony.toPlaceX = 0
  colony.toPlaceY = 0
}

/** Takes walkers in; what is too many goes. */
export function arrive(colony: Colony, x: number, y: number): void {
  colony.received += x + y
  const heldX = Math.min(MOST_HELD, colony.x + x)
  const heldY = Math.min(MOST_HELD, colony.y + y)
  colony.dropped += colony.x + x - heldX + (colony.y + y - heldY)
  colony.x = heldX
  colony.y = heldY
}

/** A detached or refusing agent holds nothing: it would gather all walkers within minutes. */
export function dropAll(colony: Colony): void {
  colony.dropped += colony.x + colony.y
  colony.x = 0
  colony.y = 0
  colony.mean = 0
}

/**
 * Walks one colony at one agent for `linkTime` (ω × seconds), in sub-steps small enough that at most half of
 * the walkers leave in each. Per sub-step: births or culls, paired kills, note X − Y, departures *linear* in the
 * sub-step's link time, so that both ends of a link use the same function and the fixed point of the mean noted
 * difference is exactly L z = b z, whatever the delays.
 * @returns the mean noted difference, walkers
 */
export function walk(colony: Colony, exits: Exits, linkTime: number, random: Random): number {
  const { encounterRate, birthRateX, birthRateY } = colony.orders
  const steps = Math.max(1, Math.ceil((linkTime * exits.totalWeight) / MOST_LEAVING))
  const h = linkTime / steps
  let difference = 0
  exits.x.fill(0)
  exits.y.fill(0)
  for (let step = 0; step < steps; step++) {
    colony.x += multiply(colony, colony.x, birthRateX * h, random)
    colony.y += multiply(colony, colony.y, birthRateY * h, random)
    colony.walkerTime += (colony.x + colony.y) * h
    const fewer = Math.min(colony.x, colony.y)
    if (fewer > 0) {
      const more = Math.max(colony.x, colony.y)
      const killed = binomial(random, fewer, -Math.expm1(-encounterRate * more * h))
      colony.x -= killed
      colony.y -= killed
      colony.kills += 2 * killed
    }
    colony.occupancyX += colony.x * h
    colony.occupancyY += colony.y * h
    difference += colony.x - colony.y
    if (exits.totalWeight > 0) {
      colony.x -= depart(colony, colony.x, exits, exits.x, h, random)
      colony.y -= depart(colony, colony.y, exits, exits.y, h, random)
    }
  }
  colony.linkTime += linkTime
  return difference / steps
}

/** @returns births, or minus the culled, of `count` walkers at probability |p| each. */
function multiply(colony: Colony, count: number, p: number, random: Random): number {
  if (count === 0 || p === 0) return 0
  if (p > 0) {
    // Above one birth per walker the draw would saturate; the whole part is certain.
    const whole = Math.floor(p)
    const births = whole * count + binomial(random, count, p - whole)
    colony.births += births
    return births
  }
  const culled = binomial(random, count, Math.min(1, -p))
  colony.culls += culled
  return -culled
}

/** Draws how many of `count` leave in all, then shares them over the exits in proportion to weight. */
function depart(
  colony: Colony,
  count: number,
  exits: Exits,
  out: Float64Array,
  h: number,
  random: Random,
): number {
  const { weights, sums, totalWeight } = exits
  const leaving = binomial(random, count, Math.min(1, totalWeight * h))
  if (leaving === 0) return 0
  colony.sent += leaving
  if (leaving <= weights.length) {
    for (let walker = 0; walker < leaving; walker++) {
      const mark = random.uniform() * totalWeight
      // Rounding may put a mark on the very end.
      out[mark < totalWeight ? firstAbove(sums, mark) : lastLive(weights)]! += 1
    }
    return leaving
  }
  let left = leaving
  let weightLeft = totalWeight
  for (let exit = 0; exit < weights.length && left > 0; exit++) {
    const weight = weights[exit]!
    if (weight === 0) continue
    const goes =
      weightLeft - weight <= 1e-12 ? left : binomial(random, left, Math.min(1, weight / weightLeft))
    out[exit]! += goes
    left -= goes
    weightLeft -= weight
  }
  // Rounding of the weights' running sum may leave a last few; they take the last live exit.
  if (left > 0) out[lastLive(weights)]! += left
  return leaving
}

/** By halving: a hub draws hundreds of walkers over hundreds of exits in a tick. */
function firstAbove(sums: Float64Array, mark: number): number {
  let low = 0
  let high = sums.length - 1
  while (low < high) {
    const middle = (low + high) >>> 1
    if (sums[middle]! > mark) high = middle
    else low = middle + 1
  }
  return low
}

function lastLive(weights: Float64Array): number {
  for (let exit = weights.length - 1; exit >= 0; exit--) if (weights[exit]! > 0) return exit
  throw new Error('walkers may leave only where a link is live')
}

/** Moves z̄ towards the tick's mean difference. The window grows with the seeding's age up to its full length. */
export function average(
  colony: Colony,
  difference: number,
  dueMs: number,
  nowMs: number,
  intervalMs: number,
): void {
  const ageMs = Math.max(dueMs, nowMs - colony.adoptedAtMs)
  const windowMs = Math.min(AVERAGING_INTERVALS * intervalMs, ageMs / 2)
  colony.mean += (difference - colony.mean) * -Math.expm1(-dueMs / windowMs)
}
