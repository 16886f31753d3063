/** How often agents tick and report. Milliseconds. */
export interface Pace {
  tickMs: number
  intervalMs: number
}

export const PACE_NAMES = ['calm', 'steady', 'brisk', 'drill'] as const
export type PaceName = (typeof PACE_NAMES)[number]

export const PACES: Record<PaceName, Pace> = {
  calm: { tickMs: 500, intervalMs: 10_000 },
  steady: { tickMs: 200, intervalMs: 2_000 },
  brisk: { tickMs: 100, intervalMs: 1_000 },
  drill: { tickMs: 20, intervalMs: 200 },
}

/** Report interval of the pace that orders stand for, though they may be in haste: paces tell apart by their ticks. */
export function ordinaryIntervalMs({ tickMs, intervalMs }: Pace): number {
  const ordinary = Object.values(PACES).find((pace) => pace.tickMs === tickMs)
  return Math.max(intervalMs, ordinary?.intervalMs ?? 0)
}

export const DEFAULT_PACE: PaceName = 'steady'
