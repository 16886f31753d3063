import { randomBytes } from 'node:crypto'
import type { LinkTrust } from '@/agent/link/link-contract'
import type { OrdersProof } from '@/lib/method/frame'
import type { Orders } from '@/lib/method/orders'
import { generateKeys, type KeyPair, signOrders, signPass, verifyOrders, verifyReceipt } from '@/lib/protocol'

export const NOW_SECONDS = Date.UTC(2031, 4, 6, 12) / 1000
export const OVERLAY_ID = 'overlay-harbourline'

export interface Identity {
  agentId: string
  keys: KeyPair
  pass: string
}

export interface TestOverlay {
  id: string
  keys: KeyPair
  /** What its agents trust. */
  trust: LinkTrust
  sign(orders: Orders): OrdersProof
  identity(agentId: string, over?: { keys?: KeyPair; expiresAt?: number }): Promise<Identity>
}

/** An overlay with its own signing key, handing out passes for a day around `NOW_SECONDS`. */
export function testOverlay(id = OVERLAY_ID, nowSeconds = NOW_SECONDS): TestOverlay {
  const keys = generateKeys()
  return {
    id,
    keys,
    trust: {
      judgeOrders: (proof) => verifyOrders(id, proof, [keys.publicKey]),
      judgeStatement: (statement) => verifyReceipt(id, statement, [keys.publicKey]),
    },
    sign: (orders) => signOrders(id, JSON.stringify(orders), keys),
    async identity(agentId, over = {}) {
      const own = over.keys ?? generateKeys()
      const pass = await signPass(keys.privateKey, {
        overlayId: id,
        agentId,
        name: agentId,
        key: own.publicKey,
        issuedAt: nowSeconds - 60,
        expiresAt: over.expiresAt ?? nowSeconds + 86_400,
      })
      return { agentId, keys: own, pass }
    },
  }
}

export const freshNonce = (): string => randomBytes(32).toString('base64url')
