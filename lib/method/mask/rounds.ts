import { Agreement, type RoundSaying } from './agreement'
import type { Layout, RoundOrders } from './layout'
import { applyMask, type MaskStream, toText } from './vector'

/** A pair begins to agree on a round while so much time is left until it, or not at all: frames have to go there and back. */
export const AGREE_TICKS = 6
/** Vectors that wait for an answer; older ones have been overtaken by newer rounds. */
export const MOST_WAITING = 4
/** An agent whose reports have not been answered for so long takes no part: its masks would not come off the others' sums. */
export const ANSWERED_WITHIN_INTERVALS = 3
export const ANSWERED_WITHIN_AT_LEAST_MS = 1_500

/** What is said to the collector of one round. */
export interface MaskedVector {
  round: number
  /** base64url of eight bytes an entry, low byte first. */
  sums: string
}

export interface RoundsComponents {
  /** The secret shared with one start of a peer as numbers; null where there is none. */
  maskOf: (peer: string, peerIncarnation: string) => MaskStream | null
}

interface Known {
  layout: Layout
  dueAtMs: number
  isTaken: boolean
}

interface Partner {
  peer: string
  agreement: Agreement
  stream: MaskStream
}

interface Waiting extends MaskedVector {
  /** Report that carried it first. */
  since: number | null
}

/** One agent's part in the masked rounds of an overlay. Pure but for the streams it is given. */
export class Rounds {
  private readonly maskOf: RoundsComponents['maskOf']
  private readonly ownId: string
  private readonly known = new Map<number, Known>()
  private readonly partners = new Map<string, Partner>()
  private waiting: Waiting[] = []
  /** Rounds up to this one are over, whoever announces them again: two moments under one mask would differ in clear. */
  private over = 0
  private answeredAtMs = Number.NEGATIVE_INFINITY

  constructor({ maskOf }: RoundsComponents, { ownId }: { ownId: string }) {
    this.maskOf = maskOf
    this.ownId = ownId
  }

  /** Orders announce rounds. Ages only ever count too long: of several the latest moment is the nearest to the truth. */
  hear(rounds: readonly RoundOrders[], issuedAtMs: number): void {
    for (const { number, fromAgeMs, ...layout } of rounds) {
      if (number <= this.over) continue
      const dueAtMs = issuedAtMs + fromAgeMs
      const known = this.known.get(number)
      if (!known) this.known.set(number, { layout, dueAtMs, isTaken: false })
      else known.dueAtMs = Math.max(known.dueAtMs, dueAtMs)
    }
    const oldest = [...this.known.keys()].sort((a, b) => b - a)[2 * MOST_WAITING]
    if (oldest === undefined) return
    this.over = oldest
    for (const number of this.known.keys()) if (number <= oldest) this.known.delete(number)
    for (const { agreement } of this.partners.values()) agreement.forget(oldest)
  }

  /** The collector has stored the report of this number, with all that it carried. */
  noteAnswered(reportNumber: number, nowMs: number): void {
    this.answeredAtMs = nowMs
    this.waiting = this.waiting.filter(({ since }) => since === null || since > reportNumber)
  }

  /** What to say to a peer in the next frame; null where nothing can be masked with it. */
  saying(
    peer: string,
    incarnation: string,
    { nowMs, tickMs, intervalMs }: { nowMs: number; tickMs: number; intervalMs: number },
  ): RoundSaying | null {
    const partner = this.partnerOf(peer, incarnation)
    if (!partner || this.known.size === 0) return null
    const limitMs = Math.max(ANSWERED_WITHIN_INTERVALS * intervalMs, ANSWERED_WITHIN_AT_LEAST_MS)
    const isHeard = nowMs - this.answeredAtMs <= limitMs
    for (const [number, { dueAtMs, isTaken }] of this.known)
      partner.agreement.decide(number, isHeard && !isTaken && dueAtMs - nowMs >= AGREE_TICKS * tickMs)
    return partner.agreement.saying()
  }

  note(peer: string, incarnation: string, saying: RoundSaying): void {
    this.partnerOf(peer, incarnation)?.agreement.note(saying)
  }

  /** Rounds whose moment has come, oldest first, each once. */
  due(nowMs: number): { round: number; layout: Layout }[] {
    const due = [...this.known].filter(([, { dueAtMs, isTaken }]) => !isTaken && nowMs >= dueAtMs)
    return due
      .sort(([a], [b]) => a - b)
      .map(([round, known]) => {
        known.isTaken = true
        return { round, layout: known.layout }
      })
  }

  /**
   * Masks a vector with all who agreed and keeps it for the next reports. Without a partner nothing is said: it would be this
   * agent's own sums in clear.
   * @param vector is used up
   */
  take(round: number, vector: BigUint64Array): void {
    const agreed = [...this.partners.values()].filter(({ agreement }) => agreement.isAgreed(round))
    if (agreed.length === 0) return
    for (const { peer, stream } of agreed) applyMask(vector, stream, round, { own: this.ownId, peer })
    this.waiting = [...this.waiting, { round, sums: toText(vector), since: null }].slice(-MOST_WAITING)
  }

  /** What report number so-and-so carries: all that has not been answered. */
  carried(reportNumber: number): MaskedVector[] {
    for (const vector of this.waiting) vector.since ??= reportNumber
    return this.waiting.map(({ round, sums }) => ({ round, sums }))
  }

  /** Another start of a peer is another partner; what was agreed with the one before still holds for its rounds. */
  private partnerOf(peer: string, incarnation: string): Partner | null {
    const key = `${peer} ${incarnation}`
    const present = this.partners.get(key)
    if (present) return present
    const stream = this.maskOf(peer, incarnation)
    if (!stream) return null
    const partner = { peer, agreement: new Agreement(), stream }
    this.partners.set(key, partner)
    return partner
  }

  /** Forgets partners that no link is kept with and nothing is agreed with any more. */
  forget(isKept: (peer: string, incarnation: string) => boolean): void {
    const open = [...this.known].flatMap(([number, { isTaken }]) => (isTaken ? [] : [number]))
    for (const [key, { agreement }] of this.partners) {
      const [peer = '', incarnation = ''] = key.split(' ')
      if (isKept(peer, incarnation) || open.some((round) => agreement.isAgreed(round))) continue
      this.partners.delete(key)
    }
  }
}
