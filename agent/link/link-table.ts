import type { CollectorDistance } from '@/lib/method/frame'
import type { CloseName, LinkPeer } from '@/lib/protocol'
import { PeerLink } from './peer-link'
import type { LinkSession } from './session'

/** The proven connections of this agent, by peer, and which start of each peer is the newest. */
export class LinkTable {
  private readonly ownId: string
  private readonly links = new Map<string, PeerLink>()
  private readonly latest = new Map<string, { incarnation: string; opened: number }>()

  constructor({ ownId }: { ownId: string }) {
    this.ownId = ownId
  }

  get all(): ReadonlyMap<string, PeerLink> {
    return this.links
  }

  isUp(peer: string): boolean {
    return this.links.get(peer)?.isUp ?? false
  }

  /** The newest start seen of a peer, and when its connection was opened. */
  latestOf(peer: string): { incarnation: string; opened: number } | null {
    return this.latest.get(peer) ?? null
  }

  /** Takes an admitted connection in; those of an older start go. @returns whether peer or start are new */
  join(session: LinkSession, { agentId, incarnation }: LinkPeer): boolean {
    const latest = this.latest.get(agentId)
    const isSameStart = latest?.incarnation === incarnation
    if (!isSameStart) this.dropAll(agentId, 'stale-incarnation')
    const opened = isSameStart ? Math.max(latest.opened, session.opened) : session.opened
    this.latest.set(agentId, { incarnation, opened })
    const present = this.links.get(agentId)
    const link = present ?? new PeerLink({ ownId: this.ownId, peer: agentId })
    this.links.set(agentId, link)
    for (const excess of link.add(session)) this.drop(excess, 'duplicate-link')
    return !present || !isSameStart
  }

  /** A message came: of several connections of one pair, the others may go by now. */
  heard(session: LinkSession, peer: string): void {
    for (const loser of this.links.get(peer)?.heard(session) ?? []) this.drop(loser, 'duplicate-link')
  }

  /** Closes a connection and forgets it at once, without waiting for the socket to say so. */
  drop(session: LinkSession, name: CloseName): void {
    if (session.peer) this.links.get(session.peer.agentId)?.remove(session)
    session.close(name)
  }

  dropAll(peer: string, name: CloseName): void {
    for (const session of [...(this.links.get(peer)?.open ?? [])]) this.drop(session, name)
  }

  /** The connection to send on to a peer, or null. */
  carrierOf(peer: string): LinkSession | null {
    const carrier = this.links.get(peer)?.carrier
    return carrier?.isOpen ? carrier : null
  }

  /** A peer has renewed its pass: that holds for all its connections. */
  renew(peer: string, passExpiresAt: number): void {
    for (const session of this.links.get(peer)?.open ?? []) {
      if (session.peer) session.peer = { ...session.peer, passExpiresAt }
    }
  }

  noteDistance(peer: string, distance: CollectorDistance | null): void {
    const link = this.links.get(peer)
    if (link) link.distance = distance
  }

  /** Peers nearer to the collector than `distance`, nearest first. */
  nearer(distance: CollectorDistance): { peer: string; distance: CollectorDistance }[] {
    const near: { peer: string; distance: CollectorDistance }[] = []
    for (const [peer, link] of this.links) {
      if (link.distance === null || link.distance >= distance || !this.carrierOf(peer)) continue
      near.push({ peer, distance: link.distance })
    }
    return near.sort((a, b) => a.distance - b.distance || (a.peer < b.peer ? -1 : 1))
  }

  /** A socket is gone. @returns whether that was the last of its link */
  gone(session: LinkSession): boolean {
    const peer = session.peer?.agentId
    const link = peer === undefined ? undefined : this.links.get(peer)
    if (peer === undefined || !link) return false
    link.remove(session)
    return !link.isUp && this.links.delete(peer)
  }
}
