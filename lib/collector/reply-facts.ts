import type { EntityManager } from '@/lib/db'
import type { Clock } from './clock'
import { findReplyFacts, type ReplyFacts } from './reply-store'

/**
 * Under load many batches come in that time, and orders only every few seconds. They say how old they are all the same; who may report is never
 * kept.
 */
export const FACTS_KEPT_MS = 100

export interface FactsRead extends ReplyFacts {
  /** When the reading began: what is in it is as old at least. */
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
      const read = { ...facts, readMs: nowMs }
      found.set(overlayId, read)
      // The first orders are waited for. Another batch may have begun later and be here already.
      const isNewest = (this.#kept.get(overlayId)?.readMs ?? nowMs) <= nowMs
      if (facts.ordersText !== null && isNewest) this.#kept.set(overlayId, read)
    }
    return found
  }
}
