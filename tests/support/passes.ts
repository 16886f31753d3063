import { randomBytes } from 'node:crypto'
import { generateKeys, type KeyPair, signPass } from '@/lib/protocol'

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
  identity(agentId: string, over?: { keys?: KeyPair; expiresAt?: number }): Promise<Identity>
}

/** An overlay with its own signing key, handing out passes for a day around `NOW_SECONDS`. */
export function testOverlay(id = OVERLAY_ID, nowSeconds = NOW_SECONDS): TestOverlay {
  const keys = generateKeys()
  return {
    id,
    keys,
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
