import type { EntityManager } from '@/lib/db'
import type { Clock } from './clock'
import { epochMs, query } from './query'
import { median } from './trend'

export const HOUR_MS = 3_600_000
export const USUAL_LEAST_DAYS = 7
export const USUAL_MOST_DAYS = 30
export const USUAL_REFRESH_MS = 5 * 60_000

export interface UsualComponents {
  forkEm(): Promise<EntityManager>
  clock: Clock
}

/** Median of hourly medians over the last 30 days; null before there are seven days of them. */
export function usualOf(hours: ReadonlyMap<number, number>, nowMs: number): number | null {
  const oldest = nowMs - USUAL_MOST_DAYS * 24 * HOUR_MS
  const kept = [...hours].filter(([hourMs]) => hourMs >= oldest)
  const firstMs = Math.min(...kept.map(([hourMs]) => hourMs))
  if (kept.length === 0 || nowMs - firstMs < USUAL_LEAST_DAYS * 24 * HOUR_MS) return null
  return median(kept.map(([, value]) => value))
}

/** What an overlay usually reads. Hours that have passed are looked at once, so that asking again is cheap. */
export class Usual {
  readonly #components: UsualComponents
  readonly #overlayId: string
  readonly #hours = new Map<number, number>()
  #readAtMs: number | null = null

  constructor(components: UsualComponents, init: { overlayId: string }) {
    this.#components = components
    this.#overlayId = init.overlayId
  }

  /** Looks into the database when what is known is older than some minutes. @param nowMs the database's time */
  async at(nowMs: number): Promise<number | null> {
    const { clock, forkEm } = this.#components
    const askedMs = clock.monotonicMs()
    if (this.#readAtMs === null || askedMs - this.#readAtMs >= USUAL_REFRESH_MS) {
      const lastHour = Math.max(...this.#hours.keys(), nowMs - USUAL_MOST_DAYS * 24 * HOUR_MS)
      await this.#read(await forkEm(), lastHour)
      this.#readAtMs = askedMs
    }
    return usualOf(this.#hours, nowMs)
  }

  async #read(em: EntityManager, fromMs: number): Promise<void> {
    const rows = await query<{ hourMs: number; value: number }>(
      em,
      `select ${epochMs(`date_trunc('hour', at, 'UTC')`)} as "hourMs",
         percentile_cont(0.5) within group (order by lambda2) as value
       from readings
       where overlay_id = ? and at >= ? and data = 'fresh' and lambda2 is not null
       group by 1`,
      [this.#overlayId, new Date(fromMs)],
    )
    for (const { hourMs, value } of rows) this.#hours.set(hourMs, value)
  }
}
