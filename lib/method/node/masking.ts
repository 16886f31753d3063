import { type Layout, type MaskedVector, Rounds, type RoundsComponents, toVector } from '../mask'
import type { Disclosure, Orders } from '../orders'
import { ordinaryIntervalMs } from '../pace'
import type { Link } from './link'
import type { HostFacts } from './report-of'
import { type RoundCase, RoundMarks, roundOf } from './round-of'

/** Most open last. */
const OPENNESS: readonly Disclosure[] = ['sealed', 'flagged', 'named']

/** What an agent does where links are not named: its sums leave it in masked rounds alone. */
export class Masking {
  private readonly rounds: Rounds | null
  private readonly marks = new RoundMarks()
  private strictest: Disclosure | null = null
  /** As the last report had it: a round's moment has no program around it. */
  private host: HostFacts | null = null

  /** @param components null for an agent that has no secrets with others, and so no part in rounds */
  constructor(components: RoundsComponents | null, init: { ownId: string }) {
    this.rounds = components && new Rounds(components, init)
  }

  /** Orders may close what was open, but not open what was closed: for that the agent has to be started anew. */
  bounded(orders: Orders): Orders {
    const { disclosure } = orders
    const held = this.strictest ?? disclosure
    const strictest = OPENNESS.indexOf(disclosure) < OPENNESS.indexOf(held) ? disclosure : held
    this.strictest = strictest
    return strictest === disclosure ? orders : { ...orders, disclosure: strictest }
  }

  hear({ disclosure, rounds }: Orders, issuedAtMs: number): void {
    if (disclosure !== 'named' && rounds) this.rounds?.hear(rounds, issuedAtMs)
  }

  noteAnswered(reportNumber: number, nowMs: number): void {
    this.rounds?.noteAnswered(reportNumber, nowMs)
  }

  noteHost(host: HostFacts): void {
    this.host = host
  }

  /** Takes the sums of rounds whose moment has come. */
  takeDue(nowMs: number, caseNow: () => Omit<RoundCase, 'host' | 'marks'>): void {
    for (const { round, layout } of this.rounds?.due(nowMs) ?? []) this.take(round, layout, caseNow())
  }

  private take(round: number, layout: Layout, now: Omit<RoundCase, 'host' | 'marks'>): void {
    const { host, marks } = this
    this.rounds?.take(round, toVector(layout, roundOf(layout, { ...now, host, marks })))
  }

  saying({ peer, peerIncarnation, state }: Link, orders: Orders | null, nowMs: number) {
    if (!orders || state !== 'open' || orders.disclosure === 'named') return null
    const { pace } = orders
    const times = { nowMs, tickMs: pace.tickMs, intervalMs: ordinaryIntervalMs(pace) }
    return this.rounds?.saying(peer, peerIncarnation, times) ?? null
  }

  note(peer: string, incarnation: string, saying: Parameters<Rounds['note']>[2] | null | undefined): void {
    if (saying) this.rounds?.note(peer, incarnation, saying)
  }

  carried(reportNumber: number): readonly MaskedVector[] {
    return this.rounds?.carried(reportNumber) ?? []
  }

  forget(isKept: (peer: string, incarnation: string) => boolean): void {
    this.rounds?.forget(isKept)
  }
}
