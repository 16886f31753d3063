/** Stretches of time the trend can show. Steps keep a drawing between 180 and 450 points. */
export interface Range {
  id: string
  label: string
  seconds: number
  stepSeconds: number
}

const minute = 60
const hour = 60 * minute
const day = 24 * hour

export const RANGES = [
  { id: '15min', label: '15 min', seconds: 15 * minute, stepSeconds: 2 },
  { id: '3h', label: '3 h', seconds: 3 * hour, stepSeconds: minute },
  { id: '24h', label: '24 h', seconds: day, stepSeconds: 4 * minute },
  { id: '7d', label: '7 d', seconds: 7 * day, stepSeconds: 30 * minute },
  { id: '30d', label: '30 d', seconds: 30 * day, stepSeconds: 2 * hour },
  { id: '1y', label: '1 year', seconds: 365 * day, stepSeconds: day },
] as const satisfies readonly Range[]

export const DEFAULT_RANGE: Range = RANGES[1]

/** The range of an address; null where it names none. */
export function rangeNamed(id: string | null): Range | null {
  return RANGES.find((range) => range.id === id) ?? null
}

/** How often a drawing of it is looked at again. */
export function refreshMs({ stepSeconds }: Range): number {
  return Math.min(10 * minute, Math.max(5, stepSeconds / 2)) * 1000
}

/** The shortest range while that holds all there is, else the usual one. */
export function fittingRange(firstAtMs: number | null, nowMs: number): Range {
  const [shortest] = RANGES
  return firstAtMs !== null && nowMs - firstAtMs < shortest.seconds * 1000 ? shortest : DEFAULT_RANGE
}

export function rangeQuery(range: Range, nowMs: number): { query: string; fromMs: number; toMs: number } {
  const fromMs = nowMs - range.seconds * 1000
  const query = new URLSearchParams({
    from: new Date(fromMs).toISOString(),
    to: new Date(nowMs).toISOString(),
    step: String(range.stepSeconds),
  }).toString()
  return { query, fromMs, toMs: nowMs }
}
