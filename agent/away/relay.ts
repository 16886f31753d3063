import type { CollectorDistance } from '@/lib/method/frame'
import type { Random } from '@/lib/method/random'
import {
  decodeRelay,
  decodeRelayReply,
  encodeRelay,
  encodeRelayReply,
  RELAY_HOPS,
  type RelayedReply,
  type SignedReport,
} from '@/lib/protocol'
import type { Clock } from '../clock'
import type { RelayKind } from '../link/link-contract'
import type { Logger } from '../logger'
import { distanceOf, FAILURES_BEFORE_RELAY, type NearerPeer, relayStep, targetsOf } from './relay-plan'
import { RelayShelf } from './relay-shelf'
import { ReturnPaths } from './return-paths'

/** What relaying asks of the links. */
export interface RelayLinks {
  setDistance(distance: CollectorDistance): void
  /** Proven peers that said they are closer than this agent, nearest first. */
  towardsCollector(): readonly NearerPeer[]
  /** Those that reach the collector themselves. */
  delivering(): readonly string[]
  /** @returns false where it could not be sent now */
  send(peer: string, kind: RelayKind, bytes: Uint8Array): boolean
}

export interface RelayComponents {
  links: RelayLinks
  clock: Clock
  random: Random
  logger: Logger
}

export interface RelayInit {
  agentId: string
  /** Whether the overlay names its links. */
  isNamed: () => boolean
  /** What the collector said of this agent's own report. Not proven: it came through others. */
  onReply: (reply: RelayedReply) => void
}

/** Agents of which it is remembered who delivers for them. */
const MOST_ASIDES = 1_024

/** Reports of agents that do not reach the collector, on their way through those that do. */
export class Relay {
  private readonly components: RelayComponents
  private readonly init: RelayInit
  private readonly shelf = new RelayShelf()
  private readonly paths = new ReturnPaths()
  /** Who delivers for whom: always the same, as from many the collector could tell more. */
  private readonly asides = new Map<string, string>()
  private hasDelivered = false
  private failedInARow = 0
  private distanceNow: CollectorDistance = 3
  private storedAtMs: number | null = null
  private stored = 0

  constructor(components: RelayComponents, init: RelayInit) {
    this.components = components
    this.init = init
  }

  get distance(): CollectorDistance {
    return this.distanceNow
  }

  /** Own reports that others brought to the collector, and when the last of them was answered. */
  get counts(): { stored: number; storedAtMs: number | null } {
    return { stored: this.stored, storedAtMs: this.storedAtMs }
  }

  /** Whether neighbours are asked to carry own reports. */
  get isNeeded(): boolean {
    return this.failedInARow >= FAILURES_BEFORE_RELAY
  }

  /** An own report was delivered, or was not. */
  noteOwn(delivered: boolean): void {
    this.hasDelivered ||= delivered
    this.failedInARow = delivered ? 0 : this.failedInARow + 1
    this.refresh()
    if (this.distanceNow > 0) this.shelf.clear()
  }

  /** Says in frames how far the collector is, by what neighbours say now. Once per tick. */
  refresh(): void {
    const { links } = this.components
    const delivers = this.hasDelivered && !this.isNeeded
    this.distanceNow = distanceOf(delivers, delivers ? [] : links.towardsCollector())
    links.setDistance(this.distanceNow)
  }

  /** Hands an own report to neighbours. @returns how many took it */
  send(report: SignedReport): number {
    const { links } = this.components
    const bytes = encodeRelay({ hops: RELAY_HOPS, report })
    const targets = targetsOf(this.distanceNow, links.towardsCollector(), null)
    return targets.filter((peer) => links.send(peer, 'relay', bytes)).length
  }

  /** Others' reports, to go with the next own one. */
  take(): SignedReport[] {
    return this.shelf.take(this.components.clock.monotonicMs())
  }

  /** The collector's answers to reports taken along: back the way they came. */
  answer(replies: readonly RelayedReply[]): void {
    const { clock, links } = this.components
    for (const reply of replies) {
      for (const peer of this.paths.to(reply.agentId, clock.monotonicMs()))
        links.send(peer, 'relayReply', encodeRelayReply(reply))
    }
  }

  receive(peer: string, kind: RelayKind, bytes: Uint8Array): void {
    if (kind === 'relay') this.receiveReport(peer, bytes)
    else this.receiveReply(peer, bytes)
  }

  private receiveReport(from: string, bytes: Uint8Array): void {
    const { clock, links, logger } = this.components
    const message = decodeRelay(bytes)
    if (!message) {
      logger.debug({ peer: from }, 'a relayed report could not be read')
      return
    }
    const { report, hops } = message
    const nowMs = clock.monotonicMs()
    const isNamed = this.init.isNamed()
    const step = relayStep({
      ownId: this.init.agentId,
      origin: report.agentId,
      from,
      hops,
      isSeen: this.paths.note(report, from, nowMs, !isNamed),
      distance: this.distanceNow,
      neighbours: links.towardsCollector(),
      aside: isNamed || from !== report.agentId ? null : this.asideFor(from),
    })
    if (step.kind === 'deliver') this.shelf.put(from, report, nowMs)
    else if (step.kind === 'pass-on') {
      const onward = encodeRelay({ hops: step.hops, report })
      const taken = step.to.filter((peer) => links.send(peer, 'relay', onward))
      // Better told by whom than not at all.
      if (taken.length === 0 && this.distanceNow === 0) this.shelf.put(from, report, nowMs)
    }
  }

  private asideFor(origin: string): string | null {
    const { links, random } = this.components
    const able = links.delivering().filter((peer) => peer !== origin)
    const held = this.asides.get(origin)
    if (held !== undefined && able.includes(held)) return held
    const chosen = able[Math.floor(random.uniform() * able.length)]
    if (chosen === undefined) return null
    if (this.asides.size >= MOST_ASIDES) this.asides.clear()
    this.asides.set(origin, chosen)
    return chosen
  }

  private receiveReply(from: string, bytes: Uint8Array): void {
    const reply = decodeRelayReply(bytes)
    if (!reply) return
    if (reply.agentId !== this.init.agentId) {
      const { clock, links } = this.components
      for (const peer of this.paths.to(reply.agentId, clock.monotonicMs()))
        if (peer !== from) links.send(peer, 'relayReply', bytes)
      return
    }
    // Not stored and no problem: another copy of it was faster.
    if (reply.problem === null) {
      this.stored += 1
      this.storedAtMs = this.components.clock.monotonicMs()
    }
    this.init.onReply(reply)
  }
}
