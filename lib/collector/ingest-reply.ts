import type { EntityManager } from '@/lib/db'
import type { Orders } from '@/lib/method/orders'
import {
  type KeyRing,
  type PassGrant,
  parseOrders,
  type ReportReply,
  signReceipt,
  statementOf,
} from '@/lib/protocol'
import type { Clock } from './clock'
import type { Admitted, Arrival } from './ingest-entry'
import type { Sender, SessionSender } from './ingest-store'
import { findRings } from './key-turn'
import { offerFor } from './offers'
import { grantPass, isPassDue, notePasses } from './passes'
import type { FactsRead, ReplyFactsReader } from './reply-facts'
import { notePassesOfSessions, type ReplyFacts } from './reply-store'
import { signerOf } from './signer'

/** Whether a pass came through to an agent that is not reached directly cannot be told: it is given one anew after this. */
export const RELAYED_PASS_MS = 60_000
const REMEMBERED_MOST = 20_000

export interface ReplyComponents {
  em: EntityManager
  clock: Clock
  reader: ReplyFactsReader
}

/** Makes replies to one batch of reports. */
export class ReplyMaker {
  readonly #components: ReplyComponents
  readonly #passLifeMs: number
  readonly #relayedPasses: Map<string, number>
  #facts: ReadonlyMap<string, FactsRead> = new Map()
  readonly #orders = new Map<string, Orders | null>()
  readonly #rings = new Map<string, Promise<KeyRing[]>>()

  /** @param relayedPasses when agents that are not reached directly were last given a pass; kept between batches */
  constructor(components: ReplyComponents, init: { passLifeMs: number; relayedPasses: Map<string, number> }) {
    this.#components = components
    this.#passLifeMs = init.passLifeMs
    this.#relayedPasses = init.relayedPasses
  }

  async load(overlayIds: ReadonlySet<string>): Promise<void> {
    const { em, reader } = this.#components
    this.#facts = await reader.read(em, overlayIds)
  }

  async replyTo({ entry, sender }: Admitted, arrival: Arrival): Promise<ReportReply> {
    const facts = this.#facts.get(sender.overlayId)
    if (!facts) return { orders: null, ordersAgeMs: 0 }
    const ordersAgeMs =
      facts.ordersText === null ? 0 : facts.ageMs + this.#components.clock.monotonicMs() - facts.readMs
    if ((entry.request.protocol ?? 1) < 2) return { orders: this.#ordersOf(facts), ordersAgeMs }
    const { report } = arrival
    const keyRings = await this.ringsFor(arrival)
    // What is not stored is not received: another account under the same number would have two receipts.
    // Where links are not named there is nothing in a report that neighbours could audit.
    const isAudited = entry.request.wantsReceipt === true && sender.disclosure === 'named'
    const isReceived = isAudited && arrival.outcome?.kind === 'stored'
    return {
      orders: null,
      ordersAgeMs,
      signedOrders: signedOrdersOf(facts),
      upgrade: offerFor(facts, sender, report.node),
      ...(keyRings ? { keyRings } : {}),
      ...(isReceived
        ? { receipt: signReceipt(facts.overlayId, statementOf(sender.agentId, report), signerOf(facts)) }
        : {}),
    }
  }

  /** What an agent's ring lacks; undefined where it is the overlay's. */
  async ringsFor({ sender, report }: Arrival): Promise<KeyRing[] | undefined> {
    const facts = this.#facts.get(sender.overlayId)
    const held = report.node.health?.keyRing
    return facts && held !== undefined && held < facts.ringVersion
      ? this.#ringsAfter(facts.overlayId, held)
      : undefined
  }

  /** New passes for those whose present one is due, by agent. One that was left out gets none by reporting. */
  async renew(own: readonly SessionSender[], relayed: readonly Sender[]): Promise<Map<string, PassGrant>> {
    const { em, clock } = this.#components
    const nowMs = clock.epochMs()
    const isDue = ({ state, passExpiresAtMs }: Sender) =>
      state === 'joined' && isPassDue(passExpiresAtMs, nowMs, this.#passLifeMs)
    const dueOwn = own.filter(isDue)
    const dueRelayed = relayed.filter((sender) => isDue(sender) && this.#isRelayedDue(sender.agentId))
    const due = new Map([...dueOwn, ...dueRelayed].map((sender) => [sender.agentId, sender]))
    const may = await notePasses(em, [...due.keys()], nowMs + this.#passLifeMs)
    const grants = new Map<string, PassGrant>()
    for (const [agentId, sender] of due) {
      const facts = this.#facts.get(sender.overlayId)
      if (may.has(agentId) && facts)
        grants.set(agentId, await grantPass(facts, sender, nowMs, this.#passLifeMs))
    }
    await notePassesOfSessions(
      em,
      dueOwn.flatMap(({ agentId, tokenHash }) => {
        const grant = grants.get(agentId)
        return grant ? [{ tokenHash, passExpiresAt: grant.passExpiresAt }] : []
      }),
    )
    for (const { agentId } of dueRelayed) this.#noteRelayed(agentId)
    return grants
  }

  #isRelayedDue(agentId: string): boolean {
    const lastMs = this.#relayedPasses.get(agentId)
    return lastMs === undefined || this.#components.clock.monotonicMs() - lastMs >= RELAYED_PASS_MS
  }

  #noteRelayed(agentId: string): void {
    if (this.#relayedPasses.size >= REMEMBERED_MOST) this.#relayedPasses.clear()
    this.#relayedPasses.set(agentId, this.#components.clock.monotonicMs())
  }

  #ordersOf({ overlayId, ordersText }: ReplyFacts): Orders | null {
    const known = this.#orders.get(overlayId)
    if (known !== undefined) return known
    const parsed = ordersText === null ? null : parseOrders(new TextEncoder().encode(ordersText))
    const orders = parsed?.ok ? parsed.orders : null
    this.#orders.set(overlayId, orders)
    return orders
  }

  #ringsAfter(overlayId: string, version: number): Promise<KeyRing[]> {
    const key = `${overlayId} ${version}`
    const asked = this.#rings.get(key) ?? findRings(this.#components.em, overlayId, version)
    this.#rings.set(key, asked)
    return asked
  }
}

/** Null until the first orders that a leader has signed. */
function signedOrdersOf({ ordersText, ordersKey, ordersSignature }: ReplyFacts): ReportReply['signedOrders'] {
  if (ordersText === null || ordersKey === null || ordersSignature === null) return null
  return { text: ordersText, key: ordersKey, signature: ordersSignature }
}
