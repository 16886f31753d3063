import type { Random } from '@/lib/method/random'

/** What links are taken from and given back to: a simulation, or what stands for one. */
export interface Linked {
  readonly nowMs: number
  join(a: number, b: number): void
  cut(a: number, b: number): void
}

/** A lost link comes back after as long as this, and up to twice that again. */
const AWAY_MS = 3_600_000

/** Takes links away and lets them come back between the same ends while time goes on. */
export class Churn {
  private readonly random: Random
  private readonly links: readonly (readonly [number, number])[]
  private readonly everyMs: number
  private readonly away = new Map<number, number>()
  private nextAtMs: number

  /** @param lostPerHour links of the whole overlay; 0 for none */
  constructor(
    { random }: { random: Random },
    init: { links: readonly (readonly [number, number])[]; lostPerHour: number; fromMs: number },
  ) {
    this.random = random
    this.links = init.links
    this.everyMs = init.lostPerHour > 0 ? 3_600_000 / init.lostPerHour : Number.POSITIVE_INFINITY
    this.nextAtMs = init.fromMs + this.random.uniform() * this.everyMs
  }

  /** Does what is due. */
  bring(linked: Linked): void {
    const { nowMs } = linked
    for (const [index, backAtMs] of this.away) {
      if (backAtMs > nowMs) continue
      this.away.delete(index)
      linked.join(...this.links[index]!)
    }
    while (this.nextAtMs <= nowMs) {
      this.nextAtMs += this.everyMs * (0.5 + this.random.uniform())
      const index = Math.floor(this.random.uniform() * this.links.length)
      if (this.away.has(index)) continue
      this.away.set(index, nowMs + AWAY_MS * (1 + 2 * this.random.uniform()))
      linked.cut(...this.links[index]!)
    }
  }
}
