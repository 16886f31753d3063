import type { WalkNode } from '@/lib/method/node'
import type { Orders } from '@/lib/method/orders'
import type { Random } from '@/lib/method/random'
import type { Report } from '@/lib/method/report'
import type { ReportReply } from '@/lib/protocol'
import type { AgentInit } from './agent-contract'
import { Relay } from './away/relay'
import { AWAY_AFTER_INTERVALS, Spool } from './away/spool'
import type { SpoolStore } from './away/spool-store'
import type { Clock } from './clock'
import { takeReply } from './collector/replies'
import { ReportLoop } from './collector/report-loop'
import { Health } from './health'
import type { LinkManager } from './link/link-manager'
import type { Logger } from './logger'
import type { Membership } from './membership'

export interface CorrespondenceComponents {
  clock: Clock
  random: Random
  logger: Logger
  node: WalkNode
  links: LinkManager
  membership: Membership
  spool?: SpoolStore
}

export interface CorrespondenceInit extends Pick<AgentInit, 'version' | 'linkKind' | 'onUpgradeOffer'> {
  agentId: string
  ticks: () => { count: number; late: number }
  /** Newer orders, verified. */
  onOrders: (orders: Orders) => void
  /** The collector does not count this agent any more. */
  onEnded: (detail: string) => void
}

/** What an agent says to its collector and hears from it: by itself, through neighbours, or later. */
export class Correspondence {
  readonly relay: Relay
  readonly spool: Spool
  readonly health: Health
  readonly reports: ReportLoop
  private readonly components: CorrespondenceComponents
  private readonly init: CorrespondenceInit
  private startedAtMs = 0

  constructor(components: CorrespondenceComponents, init: CorrespondenceInit) {
    const { clock, random, logger, links, membership, spool } = components
    const { reporter, standing } = membership
    const { agentId, onEnded } = init
    this.components = components
    this.init = init
    this.health = new Health({ linkKind: init.linkKind })
    this.relay = new Relay(
      { links, clock, random, logger },
      {
        agentId,
        isNamed: () => standing.disclosure === 'named',
        onReply: (reply) => {
          if (reply.stored && reply.number !== null)
            components.node.noteAnswered(reply.number, clock.monotonicMs())
          if (reply.keyRings) membership.trust.follow(reply.keyRings)
          void standing.takeRelayed(reply)
        },
      },
    )
    this.spool = new Spool(
      { clock, logger, store: spool, nowMs: () => reporter.nowMs() },
      { links: () => this.countLinks(), mayName: () => standing.disclosure === 'named' },
    )
    this.reports = new ReportLoop(
      { clock, random, logger, reporter, carriers: this.relay, report: () => this.report() },
      {
        agentId,
        intervalMs: () => standing.pace.intervalMs,
        privateKey: () => membership.keys.privateKey,
        prepare: (signal) => membership.finishRotation(signal),
        away: () => this.spool.summary(),
        onReply: (reply, report, ordersAgeMs) => this.take(reply, report, ordersAgeMs),
        onAttempt: (delivered) => this.spool.note(!delivered && this.isAway()),
        onEnded,
      },
    )
  }

  /** Until the signal aborts or the collector ends it. */
  async run(signal: AbortSignal): Promise<void> {
    this.startedAtMs = this.components.clock.monotonicMs()
    await this.spool.load()
    await this.reports.run(signal)
  }

  private report(): Report {
    const { clock, node, links, membership } = this.components
    links.takeIn()
    const nowMs = clock.monotonicMs()
    const { failed, tookMs, lastError } = this.reports.counts
    const { count, late } = this.init.ticks()
    return node.report(nowMs, {
      linksKnown: links.known + this.health.unresolved,
      version: this.init.version,
      uptimeSeconds: Math.round((nowMs - this.startedAtMs) / 1000),
      health: this.health.facts({
        clockSkewMs: Math.round(membership.reporter.skewMs),
        reportTookMs: tookMs,
        reportsFailed: failed,
        ticks: count,
        ticksLate: late,
        lastError: lastError ?? this.spool.error,
        keyRing: membership.trust.ring.version,
      }),
    })
  }

  private take(reply: ReportReply, report: Report, ordersAgeMs: number): void {
    const { clock, node, logger, membership } = this.components
    const { agentId, onUpgradeOffer, onOrders } = this.init
    this.spool.clear()
    node.noteAnswered(report.number, clock.monotonicMs())
    const [problem] = takeReply(
      { trust: membership.trust, node, health: this.health, logger },
      { agentId, onUpgradeOffer, follow: onOrders },
      { reply, report, ordersAgeMs, nowMs: clock.monotonicMs() },
    )
    if (problem !== undefined) this.reports.noteError(problem)
  }

  /** Neither own reports nor those that neighbours carry have been answered for a while. */
  private isAway(): boolean {
    const { clock, membership } = this.components
    const limitMs = AWAY_AFTER_INTERVALS * membership.standing.pace.intervalMs
    const { deliveredAtMs } = this.reports.counts
    const { storedAtMs } = this.relay.counts
    const reachedAtMs = Math.max(deliveredAtMs ?? this.startedAtMs, storedAtMs ?? this.startedAtMs)
    return clock.monotonicMs() - reachedAtMs > limitMs
  }

  private countLinks(): { live: number; known: number } {
    const { links } = this.components
    return { live: links.status().filter(({ up }) => up).length, known: links.known }
  }
}
