import type { EntityManager } from '@/lib/db'
import type { Log } from '@/lib/http/runtime'
import { median } from '@/lib/warn/stats/median'
import type { Clock } from './clock'
import type { Memory } from './memory'
import { epochMs, query } from './query'

export const HOUR_MS = 3_600_000
export const USUAL_LEAST_DAYS = 7
export const USUAL_MOST_DAYS = 30
export const USUAL_REFRESH_MS = 5 * 60_000
/** After a look that failed. */
export const USUAL_RETRY_MS = 30_000

export interface UsualComponents {
  forkEm(): Promise<EntityManager>
  clock: Clock
  log: Pick<Log, 'warn'>
}

/** Median of hourly medians over the last 30 days; null before there are seven days of them. */
export function usualOf(hours: ReadonlyMap<number, number>, nowMs: number): number | null {
  const oldest = nowMs - USUAL_MOST_DAYS * 24 * HOUR_MS
  const kept = [...hours].filter(([hourMs]) => hourMs >= oldest)
  const firstMs = Math.min(...kept.map(([hourMs]) => hourMs))
  if (kept.length === 0 || nowMs - firstMs < USUAL_LEAST_DAYS * 24 * HOUR_MS) return null
  return median(kept.map(([, value]) => value))
}

/** So long a grave state is an incident; after that it begins to be what is usual. */
export const USUAL_FROZEN_MOST_DAYS = 7

/**
 * What is usual stays as it was while an overlay is split or far below it: the hours of an incident would make it look
 * as if nothing were wrong. Nobody has to end it.
 * @param looked undefined while nothing has been looked up
 */
export function usualNow(
  looked: number | null | undefined,
  { usual, graveSinceMs }: Pick<Memory, 'usual' | 'graveSinceMs'>,
  nowMs: number,
): number | null {
  if (looked === undefined) return usual
  const isFrozen = graveSinceMs != null && nowMs - graveSinceMs < USUAL_FROZEN_MOST_DAYS * 24 * HOUR_MS
  return isFrozen && usual !== null ? usual : looked
}

/** What an overlay usually reads, from what is kept of each hour. Hours that have passed are looked at once. */
export class Usual {
  readonly #components: UsualComponents
  readonly #overlayId: string
  readonly #hours = new Map<number, number>()
  #looking: Promise<void> | null = null
  #dueAtMs = Number.NEGATIVE_INFINITY
  #hasLooked = false
  #stopped = false

  constructor(components: UsualComponents, init: { overlayId: string }) {
    this.#components = components
    this.#overlayId = init.overlayId
  }

  /**
   * What is known now; undefined before the first look is over. Begins a look where one is due and never waits for it:
   * rounds go on meanwhile.
   * @param nowMs the database's time
   */
  at(nowMs: number): number | null | undefined {
    if (!this.#stopped && !this.#looking && this.#components.clock.monotonicMs() >= this.#dueAtMs)
      this.#looking = this.#look(nowMs).finally(() => {
        this.#looking = null
      })
    return this.#hasLooked ? usualOf(this.#hours, nowMs) : undefined
  }

  /** Until the look under way, if there is one, is over. */
  async settled(): Promise<void> {
    await this.#looking
  }

  async stop(): Promise<void> {
    this.#stopped = true
    await this.settled()
  }

  async #look(nowMs: number): Promise<void> {
    const { clock, forkEm, log } = this.#components
    try {
      const lastHour = Math.max(...this.#hours.keys(), nowMs - USUAL_MOST_DAYS * 24 * HOUR_MS)
      await this.#read(await forkEm(), lastHour)
      this.#hasLooked = true
      this.#dueAtMs = clock.monotonicMs() + USUAL_REFRESH_MS
    } catch (error) {
      this.#dueAtMs = clock.monotonicMs() + USUAL_RETRY_MS
      if (!this.#stopped)
        log.warn({ overlayId: this.#overlayId, err: error }, 'the usual reading could not be looked up')
    }
  }

  async #read(em: EntityManager, fromMs: number): Promise<void> {
    const rows = await query<{ hourMs: number; value: number }>(
      em,
      `select ${epochMs('at')} as "hourMs", fresh_median as value from reading_hours
       where overlay_id = ? and at >= ? and fresh_median is not null`,
      [this.#overlayId, new Date(fromMs)],
    )
    for (const { hourMs, value } of rows) this.#hours.set(hourMs, value)
  }
}
