import type { OrdersProof } from '@/lib/method/frame'
import type { SignedStatement } from '@/lib/method/statement'
import {
  followsRing,
  type KeyRing,
  type PassResult,
  type SignedOrdersResult,
  type UpgradeOffer,
  upgradeText,
  verifyOrders,
  verifyPass,
  verifyReceipt,
  verifyText,
} from '@/lib/protocol'

/** The overlay's keys that an agent trusts. */
export interface HeldRing {
  version: number
  keys: readonly string[]
}

export interface TrustInit {
  overlayId: string
  /** As kept from the last start; at first, version 1 with the key that enrolment said. */
  ring: HeldRing
  /** A newer ring, to be kept for the next start. */
  onRing?: (ring: HeldRing) => void
}

/** What an agent believes because the overlay's key says so: orders, passes, offered versions, later keys. */
export class Trust {
  private readonly init: TrustInit
  private held: HeldRing
  private last: { proof: OrdersProof; result: SignedOrdersResult } | null = null

  constructor(init: TrustInit) {
    this.init = init
    this.held = init.ring
  }

  get ring(): HeldRing {
    return this.held
  }

  /** Takes over rings that follow the one held, one after the other. @returns whether any was newer */
  follow(rings: readonly KeyRing[]): boolean {
    let isNewer = false
    for (const ring of [...rings].sort((a, b) => a.version - b.version)) {
      if (!followsRing(this.init.overlayId, this.held, ring)) continue
      this.held = { version: ring.version, keys: [...ring.keys] }
      isNewer = true
    }
    if (isNewer) {
      this.last = null
      this.init.onRing?.(this.held)
    }
    return isNewer
  }

  judgeOrders(proof: OrdersProof): SignedOrdersResult {
    // The same orders come from the collector and from every neighbour.
    if (this.last && isSame(this.last.proof, proof)) return this.last.result
    const result = verifyOrders(this.init.overlayId, proof, this.held.keys)
    this.last = { proof, result }
    return result
  }

  judgeStatement(statement: SignedStatement): boolean {
    return verifyReceipt(this.init.overlayId, statement, this.held.keys)
  }

  /** Judges a pass offline, by any of the keys. Never throws. */
  async judgePass(token: string, now: Date): Promise<PassResult> {
    let result: PassResult = { ok: false, error: { code: 'pass-invalid', reason: 'no key to judge it by' } }
    for (const key of this.held.keys) {
      result = await verifyPass(token, key, this.init.overlayId, now)
      // Only a signature that does not fit may fit another key.
      if (result.ok || result.error.code !== 'pass-invalid') return result
    }
    return result
  }

  isOffered(offer: UpgradeOffer): boolean {
    return (
      this.held.keys.includes(offer.key) &&
      verifyText(offer.key, upgradeText(this.init.overlayId, offer), offer.signature)
    )
  }
}

const isSame = (a: OrdersProof, b: OrdersProof): boolean =>
  a.signature === b.signature && a.key === b.key && a.text === b.text
