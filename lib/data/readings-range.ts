import { HOURS_KEEP_DAYS, MINUTES_KEEP_DAYS, READINGS_KEEP_DAYS } from '@/lib/db/series'

/**
 * What is kept of readings, the finest first: in parts of how many seconds, for how long, and how many rows one answer
 * is made from at most, so that it takes some 20 ms (8,760 hours: 16 ms).
 */
export const KEPT = [
  { what: 'reading', partSeconds: 0, keepDays: READINGS_KEEP_DAYS, rowsMost: 6_000 },
  { what: 'minute', partSeconds: 60, keepDays: MINUTES_KEEP_DAYS, rowsMost: 12_000 },
  { what: 'hour', partSeconds: 3_600, keepDays: HOURS_KEEP_DAYS, rowsMost: Number.POSITIVE_INFINITY },
] as const
export type Kept = (typeof KEPT)[number]['what']

export const READINGS_MOST = 1_000
const DAY_MS = 86_400_000

export interface RangeAsked {
  fromMs: number
  toMs: number
  /** Null: as fine as the number of points allows. */
  stepSeconds: number | null
  intervalMs: number
  nowMs: number
}

export interface RangePlan {
  /** The coarsest that still has steps so fine, of what reaches back so far and is not too many rows. */
  kept: Kept
  /** A whole number of parts. */
  stepSeconds: number
}

export function planRange({ fromMs, toMs, stepSeconds, intervalMs, nowMs }: RangeAsked): RangePlan {
  // Steps are parts of the calendar, not of the range: at both ends there may be a part of one.
  const finest = Math.ceil((toMs - fromMs) / (READINGS_MOST - 1) / 1000)
  const wanted = Math.max(stepSeconds ?? intervalMs / 1000, finest)
  const rowsOf = (partSeconds: number) => (toMs - fromMs) / (partSeconds * 1000 || intervalMs)
  const reaching = KEPT.filter(
    ({ keepDays, partSeconds, rowsMost }) =>
      fromMs >= nowMs - keepDays * DAY_MS && rowsOf(partSeconds) <= rowsMost,
  )
  const [finestReaching = KEPT[2]] = reaching
  const { what, partSeconds } =
    [...reaching].reverse().find((kept) => kept.partSeconds <= wanted) ?? finestReaching
  return {
    kept: what,
    stepSeconds: partSeconds === 0 ? wanted : Math.max(1, Math.ceil(wanted / partSeconds)) * partSeconds,
  }
}

export interface Source {
  kept: Kept
  fromMs: number
  /** Exclusive, but for the end of the whole range. */
  toMs: number
}

/** Where a range is read: from what is kept as far as that reaches, and the rest from the finer ones. */
export function sourcesOf(
  { kept, fromMs, toMs }: Source,
  throughMs: Readonly<Record<'minute' | 'hour', number | null>>,
): Source[] {
  const finerThan = { hour: 'minute', minute: 'reading', reading: null } as const
  const sources: Source[] = []
  let from = Math.floor(fromMs / (partMsOf(kept) || 1)) * (partMsOf(kept) || 1)
  for (let what: Kept | null = kept; what !== null && from < toMs; what = finerThan[what]) {
    const until: number = what === 'reading' ? toMs : Math.min(toMs, throughMs[what] ?? from)
    if (until > from) sources.push({ kept: what, fromMs: from, toMs: until })
    from = Math.max(from, until)
  }
  return sources
}

function partMsOf(kept: Kept): number {
  return (KEPT.find(({ what }) => what === kept)?.partSeconds ?? 0) * 1000
}
