import { describe, expect, it } from 'vitest'
import { binomial, logProbability, rejectionHat, UNSURE_WITHIN } from '@/lib/method/binomial'
import { createRandom, type Random } from '@/lib/method/random'

/** Exact probabilities by the recursion of the logarithms, P(k+1)/P(k) = (n−k)/(k+1) · p/(1−p). */
function probabilities(n: number, p: number): Float64Array {
  const out = new Float64Array(n + 1)
  let log = n * Math.log1p(-p)
  for (let k = 0; k <= n; k++) {
    out[k] = Math.exp(log)
    log += Math.log((n - k) / (k + 1)) + Math.log(p) - Math.log1p(-p)
  }
  return out
}

/** Pearson's statistic against `expected`, neighbours pooled to 20 expected draws, as a normal score (Wilson–Hilferty). */
function score(sample: readonly number[], expected: Float64Array): number {
  const seen = new Float64Array(expected.length)
  for (const k of sample) seen[k]!++
  const bins: { seen: number; expected: number }[] = []
  let bin = { seen: 0, expected: 0 }
  for (let k = 0; k < expected.length; k++) {
    bin.seen += seen[k]!
    bin.expected += expected[k]! * sample.length
    if (bin.expected >= 20) {
      bins.push(bin)
      bin = { seen: 0, expected: 0 }
    }
  }
  bins.at(-1)!.seen += bin.seen
  bins.at(-1)!.expected += bin.expected
  const freedom = bins.length - 1
  const statistic = bins.reduce((sum, b) => sum + (b.seen - b.expected) ** 2 / b.expected, 0)
  const spread = 2 / (9 * freedom)
  return ((statistic / freedom) ** (1 / 3) - (1 - spread)) / Math.sqrt(spread)
}

const draw = (random: Random, count: number, n: number, p: number) =>
  Array.from({ length: count }, () => binomial(random, n, p))

const TABLE: readonly (readonly [number, number])[] = [
  [1, 0.3],
  [2, 0.5],
  [5, 0.9],
  [19, 0.5],
  [200, 0.001],
  [200, 0.01],
  [200, 0.0499],
  [200, 0.05],
  [200, 0.0501],
  [400, 0.1],
  [400, 0.97],
  [400, 0.999],
  [20, 0.5],
  [25, 0.4],
  [100, 0.1],
  [1000, 0.37],
  [100_000, 0.00009],
  [100_000, 0.0002],
  [1_000_000, 0.5],
]

describe('binomial', () => {
  it.each(TABLE)('draws n = %d, p = %d as the exact distribution says', (n, p) => {
    const sample = draw(createRandom(`${n} ${p}`), 100_000, n, p)
    expect(Math.abs(score(sample, probabilities(n, p)))).toBeLessThan(4)
  })

  it('would be caught if its p were off by one per cent', () => {
    for (const [n, p] of [
      [200, 0.01],
      [400, 0.1],
    ] as const) {
      expect(score(draw(createRandom('off'), 100_000, n, p * 1.02), probabilities(n, p))).toBeGreaterThan(4)
    }
  })

  it.each([
    [2 ** 53 - 1, 0.5],
    [2 ** 53 - 1, 1e-15],
    [2 ** 40, 0.999],
    [1e9, 3e-7],
  ])('has the mean and variance of n = %d, p = %d', (n, p) => {
    const sample = draw(createRandom(`${n} ${p}`), 100_000, n, p)
    const variance = n * p * (1 - p)
    const offsets = sample.map((k) => (k - n * p) / Math.sqrt(variance))
    const mean = offsets.reduce((sum, z) => sum + z, 0) / sample.length
    const square = offsets.reduce((sum, z) => sum + z * z, 0) / sample.length
    expect(sample.every((k) => Number.isInteger(k) && k >= 0 && k <= n)).toBe(true)
    expect(Math.abs(mean) * Math.sqrt(sample.length)).toBeLessThan(4)
    const kurtosis = 2 + 1 / variance
    expect(Math.abs(square - 1) * Math.sqrt(sample.length / kurtosis)).toBeLessThan(4)
  })

  it('is certain where nothing is left to chance, and takes no draw for it', () => {
    const none: Random = {
      uniform: () => Number.NaN,
      uint32: () => Number.NaN,
    }
    expect([binomial(none, 0, 0.4), binomial(none, 300, 0), binomial(none, 300, 1)]).toEqual([0, 0, 300])
  })

  it('ends at the extremes of the uniform', () => {
    const at = (value: number): Random => {
      const later = createRandom(1)
      const first = [value]
      return { uint32: () => 0, uniform: () => first.pop() ?? later.uniform() }
    }
    for (const value of [0, 2 ** -53, 1 - 2 ** -53]) {
      for (const [n, p] of [
        [1, 0.5],
        [200, 0.02],
        [200, 0.3],
        [2 ** 53 - 1, 1e-300],
        [40, 0.25],
      ] as const) {
        const k = binomial(at(value), n, p)
        expect(k).toBeGreaterThanOrEqual(0)
        expect(k).toBeLessThanOrEqual(n)
      }
    }
  })

  it.each([
    [-1, 0.5, 'n must be an integer from 0 to 2^53 - 1, got -1'],
    [1.5, 0.5, 'n must be an integer from 0 to 2^53 - 1, got 1.5'],
    [2 ** 53, 0.5, 'n must be an integer from 0 to 2^53 - 1, got 9007199254740992'],
    [Number.NaN, 0.5, 'n must be an integer from 0 to 2^53 - 1, got NaN'],
    [3, -0.1, 'p must be from 0 to 1, got -0.1'],
    [3, 1.1, 'p must be from 0 to 1, got 1.1'],
    [3, Number.NaN, 'p must be from 0 to 1, got NaN'],
  ])('refuses n = %d, p = %d', (n, p, message) => {
    expect(() => binomial(createRandom(1), n, p)).toThrow(new RangeError(`binomial: ${message}`))
  })
})

describe('logProbability', () => {
  it.each([
    [1, 0.5],
    [31, 0.2],
    [400, 0.013],
    [3000, 0.5],
  ])('agrees with the recursion and sums to 1 for n = %d, p = %d', (n, p) => {
    const exact = probabilities(n, p)
    let sum = 0
    for (let k = 0; k <= n; k++) {
      const own = Math.exp(logProbability(n, p, k))
      sum += own
      if (exact[k]! > 1e-290) expect(Math.abs(own / exact[k]! - 1)).toBeLessThan(1e-9)
    }
    expect(Math.abs(sum - 1)).toBeLessThan(1e-12)
  })
})

describe('rejectionHat', () => {
  const means = [10, 10.3, 12, 20]
  const table = [20, 25, 40, 100, 400, 10_000, 1_000_000_000].flatMap((n) =>
    [...means.map((mean) => mean / n), 0.001, 0.02, 0.1, 0.3, 0.5]
      .filter((p) => p <= 0.5 && n * p > 9.999)
      .map((p) => [n, p] as const),
  )

  it.each(table)(
    'lies above the distribution, and accepts unseen only what lies under it: n = %d, p = %d',
    (n, p) => {
      const { a, b, centre, surely, alpha } = rejectionHat(n, p)
      const atMode = logProbability(n, p, Math.floor((n + 1) * p))
      for (let i = 0; i < 2000; i++) {
        const u = (i + 0.5) / 2000 - 0.5
        const edge = 0.5 - Math.abs(u)
        const k = Math.floor(((2 * a) / edge + b) * u + centre)
        if (k < 0 || k > n) {
          // What cannot be must never be accepted unseen.
          expect(edge).toBeLessThan(UNSURE_WITHIN)
          continue
        }
        const accepted = (Math.exp(logProbability(n, p, k) - atMode) * (a / (edge * edge) + b)) / alpha
        if (accepted > 1) throw new Error(`k = ${k} would be accepted with probability ${accepted}`)
        if (edge >= UNSURE_WITHIN && accepted < surely) throw new Error(`k = ${k}: ${accepted} < ${surely}`)
      }
    },
  )
})
