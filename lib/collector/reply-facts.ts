import type { EntityManager } from '@/lib/db'
import type { Clock } from './clock'
import { findReplyFacts, type ReplyFacts } from './reply-store'

/**
 * Under load many batches come in that time, and orders only every few seconds. It is as though reports had come in so much sooner, and
 * orders say how old they are all the same.
 */
export const FACTS_KEPT_MS = 100

export interface FactsRead extends ReplyFacts {
  readMs: number
}

/** What replies are made from, kept from batch to batch for a moment. */
export class ReplyFactsReader {
  readonly #clock: Clock
  readonly #kept = new Map<string, FactsRead>()

  constructor(clock: Clock) {
    this.#clock = clock
  }

  async read(em: EntityManager, overlayIds: ReadonlySet<string>): Promise<ReadonlyMap<string, FactsRead>> {
    const nowMs = this.#clock.monotonicMs()
    for (const [overlayId, { readMs }] of this.#kept)
      if (nowMs - readMs > FACTS_KEPT_MS) this.#kept.delete(overlayId)
    const found = new Map<string, FactsRead>()
    for (const overlayId of overlayIds) {
      const kept = this.#kept.get(overlayId)
      if (kept) found.set(overlayId, kept)
    }
    const missing = [...overlayIds].filter((overlayId) => !found.has(overlayId))
    for (const [overlayId, facts] of await findReplyFacts(em, missing)) {
      const read = { ...facts, readMs: this.#clock.monotonicMs() }
      found.set(overlayId, read)
      // The first orders are waited for.
      if (facts.ordersText !== null) this.#kept.set(overlayId, read)
    }
    return found
  }
}
