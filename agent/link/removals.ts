import type { Clock } from '../clock'
import { REMOVAL_MS } from './link-contract'

export interface RemovalsComponents {
  clock: Clock
}

export interface RemovalsInit {
  /** The other end did not answer in time. */
  onOverdue: (peer: string) => void
}

/** Links that are being taken down: frames go on until all walkers have arrived, or the time for it is over. */
export class Removals {
  private readonly clock: Clock
  private readonly init: RemovalsInit
  private readonly cancels = new Map<string, () => void>()

  constructor({ clock }: RemovalsComponents, init: RemovalsInit) {
    this.clock = clock
    this.init = init
  }

  has(peer: string): boolean {
    return this.cancels.has(peer)
  }

  start(peer: string): void {
    this.end(peer)
    this.cancels.set(
      peer,
      this.clock.after(REMOVAL_MS, () => this.init.onOverdue(peer)),
    )
  }

  end(peer: string): void {
    this.cancels.get(peer)?.()
    this.cancels.delete(peer)
  }

  stop(): void {
    for (const cancel of this.cancels.values()) cancel()
  }
}
