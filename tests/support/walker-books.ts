import type { Sums } from '@/lib/method/report'

/** The walkers of one seeding of a colony over all agents. */
export interface Books {
  slot: string
  held: number
  /** seeded + births − kills − culls − dropped */
  made: number
  sent: number
  received: number
}

/**
 * Adds the last reports of all agents up, by colony and seeding. Where nothing walks any more and every frame has arrived,
 * sent = received and held = made, to the walker; what is missing was lost with agents that were killed.
 */
export function booksOf(reports: readonly Pick<Sums, 'colonies'>[]): Books[] {
  const books = new Map<string, Books>()
  for (const { colonies } of reports) {
    for (const { colony, seeding, heldX, heldY, counters } of colonies) {
      const slot = `${colony}/${seeding}`
      const book = books.get(slot) ?? { slot, held: 0, made: 0, sent: 0, received: 0 }
      books.set(slot, book)
      book.held += heldX + heldY
      book.made += counters.seeded + counters.births - counters.kills - counters.culls - counters.dropped
      book.sent += counters.sent
      book.received += counters.received
    }
  }
  return [...books.values()].sort((a, b) => a.slot.localeCompare(b.slot))
}

/** What of the walkers sent has not arrived: none in balanced books of agents that are all heard. */
export function missing({ sent, received }: Books): number {
  return sent - received
}
