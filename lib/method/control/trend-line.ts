export interface TimedValue {
  atMs: number
  value: number
}

/** Least-squares line through values over time, and what scatters about it. */
export interface TrendLine {
  perMs: number
  /** Standard deviation of the residuals. */
  scatter: number
}

/** @returns null for fewer than four values, or where all are of one time */
export function trendLine(values: readonly TimedValue[]): TrendLine | null {
  const n = values.length
  if (n < 4) return null
  const meanMs = values.reduce((sum, { atMs }) => sum + atMs, 0) / n
  const mean = values.reduce((sum, { value }) => sum + value, 0) / n
  let sxy = 0
  let sxx = 0
  for (const { atMs, value } of values) {
    sxy += (atMs - meanMs) * (value - mean)
    sxx += (atMs - meanMs) ** 2
  }
  if (sxx === 0) return null
  const perMs = sxy / sxx
  const squares = values.reduce(
    (sum, { atMs, value }) => sum + (value - mean - perMs * (atMs - meanMs)) ** 2,
    0,
  )
  return { perMs, scatter: Math.sqrt(squares / (n - 2)) }
}
