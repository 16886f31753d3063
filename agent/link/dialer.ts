import type { Random } from '@/lib/method/random'
import { type Backoff, backoffMs } from '../backoff'
import type { Clock } from '../clock'
import type { Connection, Transport } from '../transport/transport'

/** A link that lasted this long was a good one: the next wait starts small again. */
export const GOOD_LINK_MS = 5_000

export interface DialerComponents {
  clock: Clock
  random: Random
  transport: Transport
}

export interface DialerInit {
  address: string
  backoff: Backoff
  /** Asked after a wait: there may be a link by then. */
  isWanted: () => boolean
  /** Takes an open connection over; `ended` is called once it is gone. */
  opened: (connection: Connection) => void
  failed: (reason: string, waitMs: number) => void
}

/** Dials one address, again and again with growing jittered waits, for as long as it is wanted. */
export class Dialer {
  private readonly clock: Clock
  private readonly random: Random
  private readonly transport: Transport
  private readonly init: DialerInit
  private abort: AbortController | null = null
  private cancelWait: (() => void) | null = null
  private busy = false
  private failures = 0
  private openedAtMs = 0

  constructor({ clock, random, transport }: DialerComponents, init: DialerInit) {
    this.clock = clock
    this.random = random
    this.transport = transport
    this.init = init
  }

  get address(): string {
    return this.init.address
  }

  /** Dials now, unless it is dialing, waiting or connected already. */
  want(): void {
    if (this.busy || this.cancelWait) return
    this.busy = true
    this.abort = new AbortController()
    const { signal } = this.abort
    void this.transport.dial(this.init.address, signal).then((result) => {
      if (signal.aborted) {
        if (result.ok) result.connection.close(1001, 'no longer wanted')
        return
      }
      if (!result.ok) {
        this.wait(result.reason, false)
        return
      }
      this.openedAtMs = this.clock.monotonicMs()
      this.init.opened(result.connection)
    })
  }

  /**
   * The connection it opened is gone. With `again`, dials once more after a wait; `hopeless` starts at the longest.
   */
  ended(reason: string, { again, hopeless }: { again: boolean; hopeless: boolean }): void {
    if (this.clock.monotonicMs() - this.openedAtMs >= GOOD_LINK_MS) this.failures = 0
    if (again) this.wait(reason, hopeless)
    else this.busy = false
  }

  /** A link it did not open is gone. */
  wantSoon(reason: string): void {
    if (!this.busy && !this.cancelWait) this.wait(reason, false)
  }

  /** Dials at once, even in the middle of a wait. */
  wantNow(): void {
    this.cancelWait?.()
    this.cancelWait = null
    this.want()
  }

  stop(): void {
    this.abort?.abort()
    this.cancelWait?.()
    this.cancelWait = null
    this.busy = false
  }

  private wait(reason: string, hopeless: boolean): void {
    this.busy = false
    const failures = hopeless ? 30 : this.failures
    this.failures += 1
    const waitMs = backoffMs(failures, this.init.backoff, this.random)
    this.init.failed(reason, waitMs)
    this.cancelWait = this.clock.after(waitMs, () => {
      this.cancelWait = null
      if (this.init.isWanted()) this.want()
    })
  }
}
