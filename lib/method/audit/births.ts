/** Births less culls may leave the range of rates in force by this factor. */
export const MOST_BIRTHS = 1.5
/** And by this share of births and culls together: an order may have gone by unseen. */
export const TURNOVER_SHARE = 0.1
/** A count is judged this many standard deviations beyond that (p < 3·10⁻⁷). */
export const SURE = 5
/** By how much the share of type X among the walkers may be off: it is known from samples, or from after the kills. */
export const SHARE_SLACK = 0.1
/** One stretch far out must not outweigh those that follow: it counts for no more than this. */
export const MOST_OF_ONE = 4
const FEW = 20

/**
 * Births less culls as declared, and their mean at the lowest and the highest of the rates in force; walkers. Only the difference
 * is judged: rates change sign where populations are led back, and both together change nothing but noise.
 */
export interface BirthClaim {
  net: number
  turnover: number
  least: number
  most: number
}

export const noBirths = (): BirthClaim => ({ net: 0, turnover: 0, least: 0, most: 0 })

/**
 * Adds what was declared for so much walker-time (walkers × link time), and what may be expected at any of the rates in
 * force. The types have rates of their own, which may differ in sign.
 */
export function addBirths(
  claim: BirthClaim,
  { births, culls }: { births: number; culls: number },
  rates: readonly { x: number; y: number }[],
  shareX: number,
  walkerTime: number,
): void {
  const shares = [Math.max(0, shareX - SHARE_SLACK), Math.min(1, shareX + SHARE_SLACK)]
  const both = rates.flatMap(({ x, y }) => shares.map((share) => share * x + (1 - share) * y))
  const least = Math.min(...both) * walkerTime
  const most = Math.max(...both) * walkerTime
  const cap = MOST_OF_ONE * Math.max(Math.abs(least), Math.abs(most)) + FEW
  claim.net += Math.max(-cap, Math.min(cap, births - culls))
  claim.turnover += Math.min(cap, births + culls)
  claim.least += least
  claim.most += most
}

/**
 * Births and culls are binomial draws at the rates in force: their variance is at most their mean, here the larger of what was
 * declared and what was expected.
 * @returns declared over the nearest end of the range where births less culls lie outside beyond doubt, else 1
 */
export function birthsOff({ net, turnover, least, most }: BirthClaim): number {
  const expected = Math.max(Math.abs(least), Math.abs(most), 1)
  const slack = TURNOVER_SHARE * turnover + SURE * Math.sqrt(Math.max(turnover, expected))
  const above = most + (MOST_BIRTHS - 1) * Math.abs(most) + slack
  const below = least - (1 - 1 / MOST_BIRTHS) * Math.abs(least) - slack
  if (net > above) return net / (Math.abs(most) || 1)
  if (net < below) return net / (Math.abs(least) || 1)
  return 1
}
