import { followsRing, type KeyRing, type ReportReply, verifyOrders, verifyPass } from '@/lib/protocol'
import { deliver, type Member } from './collector'
import { healthyReport } from './reports'

/** An agent as far as trust goes: follows rings, and takes only orders and passes signed by a key it holds. */
export class RingHolder {
  readonly member: Member
  readonly #overlayId: string
  held: { version: number; keys: readonly string[] }
  /** Which keys signed orders it took, in order. */
  readonly signedBy: string[] = []
  readonly refused: string[] = []
  sequence = 0
  shut: readonly { agentId: string; reason: string }[] = []
  #number = 0

  constructor(member: Member, init: { overlayId: string; overlayKey: string }) {
    this.member = member
    this.#overlayId = init.overlayId
    this.held = { version: 1, keys: [init.overlayKey] }
  }

  async report(): Promise<ReportReply> {
    this.#number += 1
    const report = healthyReport(this.#number, { keyRing: this.held.version })
    const reply = await deliver(this.member, { ...report, protocol: 2 })
    // Rings first: the orders may be signed by a key they bring.
    this.follow(reply.keyRings ?? [])
    if (reply.signedOrders) {
      const judged = verifyOrders(this.#overlayId, reply.signedOrders, this.held.keys)
      if (judged.ok) {
        this.sequence = judged.orders.sequence
        this.shut = judged.orders.shut ?? []
        if (this.signedBy.at(-1) !== reply.signedOrders.key) this.signedBy.push(reply.signedOrders.key)
      } else this.refused.push(judged.reason)
    }
    return reply
  }

  follow(rings: readonly KeyRing[]): void {
    for (const ring of rings)
      if (followsRing(this.#overlayId, this.held, ring))
        this.held = { version: ring.version, keys: ring.keys }
  }

  /** Whether it would let in who shows this pass. */
  async takes(pass: string): Promise<boolean> {
    for (const key of this.held.keys)
      if ((await verifyPass(pass, key, this.#overlayId, new Date())).ok) return true
    return false
  }
}
