import type { Random } from './random'

/** From this mean of the rarer outcome on, rejection is used in place of inversion. */
export const REJECTION_FROM_MEAN = 10

/**
 * Number of successes in `n` independent trials of probability `p`; n an integer in [0, 2⁵³ − 1], p in [0, 1].
 * Throws RangeError for anything else.
 *
 * No approximation but floating point. Inversion (algorithm BINV: Kachitvichyanukul and Schmeiser, "Binomial
 * random variate generation", Comm. ACM 31, 1988) where n·min(p, 1−p) < 10: a 53-bit uniform, so each
 * outcome's probability is off by at most about 2⁻⁵⁰, and outcomes rarer than that together may not appear.
 * Transformed rejection (BTRS: W. Hörmann, "The generation of binomial random variates", J. Stat. Comput.
 * Simul. 46, 1993) above, its test in the saddle-point form of C. Loader ("Fast and accurate computation of
 * binomial probabilities", 2000), which does not cancel: relative error of a probability about 1e-13 to
 * n = 10⁹; at n = 2⁵³ the rounding of n·p moves the whole by about 1e-8 standard deviations.
 */
export function binomial(random: Random, n: number, p: number): number {
  if (!(n >= 0 && n <= Number.MAX_SAFE_INTEGER) || Math.floor(n) !== n)
    throw new RangeError(`binomial: n must be an integer from 0 to 2^53 - 1, got ${n}`)
  if (!(p >= 0 && p <= 1)) throw new RangeError(`binomial: p must be from 0 to 1, got ${p}`)
  if (n === 0 || p === 0) return 0
  if (p === 1) return n
  // 1 − p is exact for p in [½, 1] (Sterbenz), so nothing is lost by counting failures.
  if (p > 0.5) return n - rarer(random, n, 1 - p)
  return rarer(random, n, p)
}

function rarer(random: Random, n: number, p: number): number {
  return n * p < REJECTION_FROM_MEAN ? byInversion(random, n, p) : byRejection(random, n, p)
}

function byInversion(random: Random, n: number, p: number): number {
  const odds = p / (1 - p)
  const none = Math.exp(n * Math.log1p(-p))
  for (;;) {
    let left = random.uniform()
    let term = none
    let k = 0
    while (left >= term && k < n) {
      left -= term
      term *= ((n - k) / (k + 1)) * odds
      k++
      // The terms summed fall short of 1 by rounding; a draw from that crack is drawn again.
      if (term < 1e-18 && k > n * p) break
    }
    if (left < term) return k
  }
}

/** The hat α/(a/(½−|u|)² + b) over u ↦ ⌊(2a/(½−|u|) + b)u + centre⌋, and the part of it accepted unseen. */
export function rejectionHat(n: number, p: number) {
  const mean = n * p
  const deviation = Math.sqrt(mean * (1 - p))
  const b = 1.15 + 2.53 * deviation
  const a = -0.0873 + 0.0248 * b + 0.01 * p
  return { a, b, centre: mean + 0.5, surely: 0.92 - 4.2 / b, alpha: (2.83 + 5.1 / b) * deviation }
}

/** Half-width in u, from the ends, of the strip where nothing is accepted unseen. */
export const UNSURE_WITHIN = 0.07

function byRejection(random: Random, n: number, p: number): number {
  const { a, b, centre, surely, alpha } = rejectionHat(n, p)
  let atMode = Number.NaN
  for (;;) {
    const u = random.uniform() - 0.5
    const v = random.uniform()
    const edge = 0.5 - Math.abs(u)
    const k = Math.floor(((2 * a) / edge + b) * u + centre)
    if (edge >= UNSURE_WITHIN && v <= surely) return k
    if (!(k >= 0 && k <= n)) continue
    if (Number.isNaN(atMode)) atMode = logProbability(n, p, Math.floor((n + 1) * p))
    if (Math.log((v * alpha) / (a / (edge * edge) + b)) <= logProbability(n, p, k) - atMode) return k
  }
}

/** Logarithm of the binomial probability of k; 0 < p < 1. Loader's saddle-point form. */
export function logProbability(n: number, p: number, k: number): number {
  if (k === 0) return n * Math.log1p(-p)
  if (k === n) return n * Math.log(p)
  const rest = n - k
  const corrections = stirlingError(n) - stirlingError(k) - stirlingError(rest)
  const deviances = deviance(k, n * p) + deviance(rest, n * (1 - p))
  return corrections - deviances + 0.5 * Math.log(n / k / rest / (2 * Math.PI))
}

/** x·ln(x/m) + m − x without cancellation near x = m. */
function deviance(x: number, m: number): number {
  const difference = x - m
  if (Math.abs(difference) >= 0.1 * (x + m)) return x * Math.log(x / m) - difference
  const ratio = difference / (x + m)
  let sum = difference * ratio
  let term = 2 * x * ratio
  for (let odd = 3; ; odd += 2) {
    term *= ratio * ratio
    const next = sum + term / odd
    if (next === sum) return sum
    sum = next
  }
}

const EXACT_UP_TO = 15
const SMALL_ERRORS = Array.from({ length: EXACT_UP_TO + 1 }, (_, n) => {
  let factorial = 1
  for (let i = 2; i <= n; i++) factorial *= i
  return n === 0 ? 0 : Math.log(factorial) - 0.5 * Math.log(2 * Math.PI * n) - n * Math.log(n) + n
})

/** ln n! less Stirling's formula, to 1e-15. */
function stirlingError(n: number): number {
  if (n <= EXACT_UP_TO) return SMALL_ERRORS[n]!
  const square = n * n
  return (1 / 12 - (1 / 360 - (1 / 1260 - (1 / 1680 - 1 / 1188 / square) / square) / square) / square) / n
}
