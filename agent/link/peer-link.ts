import type { CollectorDistance } from '@/lib/method/frame'
import type { LinkSession } from './session'

/** More connections than this of one pair are not kept, whoever dials them. */
export const MAX_SESSIONS_PER_PEER = 4

/**
 * The connections of one pair of agents, of which one stays. Of both ends the one with the smaller id decides, so
 * that they never close each other's choice: it keeps the newest and closes the rest once the newest has carried a
 * frame. The other end sends where it last heard. Until then both connections deliver; ledgers belong to the
 * peers, so nothing is counted twice.
 */
export class PeerLink {
  readonly peer: string
  readonly decides: boolean
  /** How far from the collector the other end says it is; null in version 1. */
  distance: CollectorDistance | null = null
  private readonly sessions: LinkSession[] = []
  private current: LinkSession | null = null

  constructor(init: { ownId: string; peer: string }) {
    this.peer = init.peer
    this.decides = init.ownId < init.peer
  }

  get isUp(): boolean {
    return this.sessions.length > 0
  }

  get open(): readonly LinkSession[] {
    return this.sessions
  }

  /** The connection to send on, or null. */
  get carrier(): LinkSession | null {
    return this.current
  }

  get incarnation(): string | null {
    return this.sessions[0]?.peer?.incarnation ?? null
  }

  /** @returns connections that are too many */
  add(session: LinkSession): LinkSession[] {
    this.sessions.push(session)
    if (this.decides || !this.current) this.current = session
    const excess = this.sessions.length - MAX_SESSIONS_PER_PEER
    return excess > 0 ? this.sessions.filter((other) => other !== this.current).slice(0, excess) : []
  }

  /** @returns connections that have lost the choice and may go */
  heard(session: LinkSession): LinkSession[] {
    if (!this.decides) {
      this.current = session
      return []
    }
    if (session !== this.current || this.sessions.length === 1) return []
    return this.sessions.filter((other) => other !== session)
  }

  remove(session: LinkSession): void {
    const at = this.sessions.indexOf(session)
    if (at >= 0) this.sessions.splice(at, 1)
    if (this.current === session) this.current = this.sessions.at(-1) ?? null
  }
}
