import type { OrdersProof } from '@/lib/method/frame'
import type { Report } from '@/lib/method/report'
import {
  generateKeys,
  type KeyPair,
  type KeyRing,
  type PassGrant,
  type Receipt,
  signKeyRing,
  signOrders,
  signPass,
  signReceipt,
  signText,
  statementOf,
  type UpgradeOffer,
  upgradeText,
} from '@/lib/protocol'

/** The overlay's signing key, and what is signed with it. */
export class TestAuthority {
  readonly overlayId: string
  keys: KeyPair = generateKeys()
  /** Every ring after the first, oldest first. */
  readonly rings: KeyRing[] = []
  private trusted: string[]

  constructor({ overlayId }: { overlayId: string }) {
    this.overlayId = overlayId
    this.trusted = [this.keys.publicKey]
  }

  /** Another key signs from now on; the one before stays good. */
  rotate(): void {
    const next = generateKeys()
    this.trusted = [next.publicKey, this.keys.publicKey]
    const version = this.rings.length + 2
    this.rings.push(signKeyRing(this.overlayId, { version, keys: this.trusted }, this.keys))
    this.keys = next
  }

  orders(text: string): OrdersProof {
    return signOrders(this.overlayId, text, this.keys)
  }

  receipt(agentId: string, report: Report): Receipt {
    return signReceipt(this.overlayId, statementOf(agentId, report), this.keys)
  }

  offer(offer: { version: string; sha256: string; path: string }): UpgradeOffer {
    const signature = signText(this.keys.privateKey, upgradeText(this.overlayId, offer))
    return { ...offer, key: this.keys.publicKey, signature }
  }

  async pass(
    holder: { agentId: string; name: string; key: string },
    nowMs: number,
    lastsMs: number,
  ): Promise<PassGrant> {
    const issuedAt = Math.floor(nowMs / 1000)
    const expiresAt = issuedAt + Math.ceil(lastsMs / 1000)
    const claims = { overlayId: this.overlayId, ...holder, issuedAt, expiresAt }
    const pass = await signPass(this.keys.privateKey, claims)
    return { pass, passExpiresAt: new Date(expiresAt * 1000).toISOString() }
  }
}
