/** How fast a population may be led back to its size, per interval of link time. */
export const RETURN_RATE = 0.15
/** Limits of the common birth rate and of each type's, per interval of link time. */
export const MOST_COMMON = 0.4
export const MOST_BIRTH = 0.6
export const IMBALANCE_RATE = 0.25
/**
 * ω is held at λ̂·ω·(two intervals) = this. On simulated overlays 0.3 takes 76–230 s on a hub of degree 200 where 0.5
 * takes 50–78 s; at 0.7 populations swing and readings err by 2–9 %.
 */
export const LOOP_GAIN = 0.45
export const LOOP_INTERVALS = 2
export const LEAST_FIRST_LAMBDA = 0.5
export const MOST_LINK_TIME_PER_TICK = 1
export const SLOWEST_STEP = 0.2
export const FASTEST_STEP = 2
/** Every change of ω stirs the walkers up a little: it stays while it is within this share of what is wanted. */
export const NEAR_ENOUGH = 0.12

const clip = (value: number, limit: number): number => Math.max(-limit, Math.min(limit, value))

export interface BirthRateInput {
  /** Kills per walker and link time over the last interval. */
  deathRate: number
  populationX: number
  populationY: number
  /** Walkers wanted per type. */
  target: number
  /** Link time per report interval, ω × seconds. */
  intervalLinkTime: number
  /** Link time per tick. */
  tickLinkTime: number
}

/**
 * Birth rates for the next interval, per walker and link time: the death rate (a tick of linear steps adds the
 * known factor 1/(1−hλ)), led towards the wanted population, with the imbalance ΣX − ΣY steered to 0.
 */
export function birthRates(input: BirthRateInput): { birthRateX: number; birthRateY: number } {
  const { deathRate, populationX, populationY, target, intervalLinkTime: t } = input
  const mean = (populationX + populationY) / 2
  const replaced = deathRate / Math.max(0.5, 1 - input.tickLinkTime * deathRate)
  const back = clip((RETURN_RATE * Math.log(target / mean)) / t, RETURN_RATE / t)
  const imbalance = populationX - populationY
  // Births in proportion to a type's number would widen an imbalance of more than half faster than it is steered.
  const evenness = Math.min(1, 2 * (1 - Math.abs(imbalance) / (populationX + populationY)))
  const common = evenness * clip(replaced + back, MOST_COMMON / t)
  const gain = Math.max(0, common) + IMBALANCE_RATE / t
  return {
    birthRateX: clip(common - (gain * imbalance) / (2 * populationX), MOST_BIRTH / t),
    birthRateY: clip(common + (gain * imbalance) / (2 * populationY), MOST_BIRTH / t),
  }
}

/** The cross-check may lower the λ̂ that ω follows to this share of the Ritz value, and no further. */
export const LEAST_OF_RITZ = 0.9

/** However few walkers there are, they meet as though there were this share of those wanted. */
export const LEAST_FILLED = 0.1

/**
 * β, kills per pair of one node and link time: twice the mean weighted degree per walker there, so that types part before they walk on. It goes
 * by the walkers there are: at a third of those wanted and β for all of them both stood mixed on random regular graphs of 36 nodes, and readings
 * called fresh were 16–20 % high.
 * @param filled share of the wanted walkers there are; more count as all
 */
export function encounterRate(meanWeightedDegree: number, walkersPerNode: number, filled = 1): number {
  return (2 * meanWeightedDegree) / (walkersPerNode * Math.max(LEAST_FILLED, Math.min(1, filled)))
}

/**
 * λ̂ that ω follows: the smaller of both estimates, for the Ritz value comes down from above. But the cross-check counts hardly any
 * kills where populations have fallen: at 0.75 of the Ritz value and a gain of 0.6 populations swung on a random regular graph of 16 nodes,
 * and readings called fresh stood 5–30 % high.
 */
export function walkingLambda(ritz: number, crossCheck: number | null): number {
  return Math.max(LEAST_OF_RITZ * ritz, Math.min(ritz, crossCheck ?? ritz))
}

/**
 * ω before anything is known but the mean weighted degree d: as for half the λ₂ that no large d-regular graph much exceeds,
 * d − 2√(d−1) (N. Alon, "Eigenvalues and expanders", Combinatorica 6, 1986; from memory). Well linked overlays would lose
 * most walkers to the first interval at a higher rate.
 */
export function firstLinkTimePerSecond(meanWeightedDegree: number, pace: { intervalMs: number }): number {
  const most = meanWeightedDegree - 2 * Math.sqrt(Math.max(0, meanWeightedDegree - 1))
  return (LOOP_GAIN * 1000) / (Math.max(LEAST_FIRST_LAMBDA, most / 2) * LOOP_INTERVALS * pace.intervalMs)
}

export function fastestLinkTimePerSecond({ tickMs }: { tickMs: number }): number {
  return (MOST_LINK_TIME_PER_TICK * 1000) / tickMs
}

/** ω that the loop bears at this λ, before any limit. */
export function wantedLinkTimePerSecond(
  lambda: number,
  pace: { tickMs: number; intervalMs: number },
): number {
  return lambda > 0
    ? (LOOP_GAIN * 1000) / (lambda * LOOP_INTERVALS * pace.intervalMs)
    : fastestLinkTimePerSecond(pace)
}

/** The λ for which the loop would choose this ω. */
export function lambdaWalkedFor(linkTimePerSecond: number, pace: { intervalMs: number }): number {
  return (LOOP_GAIN * 1000) / (linkTimePerSecond * LOOP_INTERVALS * pace.intervalMs)
}

/**
 * ω for the next interval, link time per second.
 * @param lambda the smaller of the smoothed cross-check and the last Ritz value; 0 or null where unknown
 */
export function nextLinkTimePerSecond(
  current: number,
  lambda: number | null,
  pace: { tickMs: number; intervalMs: number },
): number {
  const fastest = fastestLinkTimePerSecond(pace)
  if (lambda === null) return current
  const wanted = wantedLinkTimePerSecond(lambda, pace)
  if (Math.abs(wanted / current - 1) <= NEAR_ENOUGH && current <= fastest) return current
  return Math.max(current * SLOWEST_STEP, Math.min(current * FASTEST_STEP, wanted, fastest))
}
