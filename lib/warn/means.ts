import type { WarnFacts } from './facts'
import type { Mean } from './falling'
import type { RuleSettings } from './rule'

export type FallingSettings = Extract<RuleSettings, { kind: 'falling' }>
const HOUR_MS = 3_600_000
export const MEAN_MS = { minute: 60_000, hour: HOUR_MS } as const

interface Bucket {
  startMs: number
  sum: number
  count: number
}

/** Means of fresh readings over whole minutes or hours, as a falling rule looks at them; readings come in order of time. */
export class Means {
  readonly #bucketMs: number
  readonly #windowMs: number
  #whole: Mean[] = []
  #open: Bucket | null = null

  constructor({ means, windowHours }: Pick<FallingSettings, 'means' | 'windowHours'>) {
    this.#bucketMs = MEAN_MS[means]
    this.#windowMs = windowHours * HOUR_MS
  }

  /** @returns whether another mean is whole */
  add({ atMs, isFresh, lambda2 }: Pick<WarnFacts, 'atMs' | 'isFresh' | 'lambda2'>): boolean {
    const startMs = Math.floor(atMs / this.#bucketMs) * this.#bucketMs
    const closes = this.#open !== null && this.#open.startMs < startMs
    if (closes) this.#close()
    if (!isFresh || lambda2 === null) return closes
    this.#open ??= { startMs, sum: 0, count: 0 }
    this.#open.sum += lambda2
    this.#open.count += 1
    return closes
  }

  /** Of the window that ends now; the one that is not whole is left out. */
  before(nowMs: number): readonly Mean[] {
    this.#whole = this.#whole.filter(({ atMs }) => nowMs - atMs <= this.#windowMs)
    return this.#whole
  }

  #close(): void {
    const { startMs, sum, count } = this.#open!
    this.#whole.push({ atMs: startMs + this.#bucketMs / 2, value: sum / count })
    this.#open = null
  }
}
