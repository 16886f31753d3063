import {
  createCipheriv,
  createPublicKey,
  diffieHellman,
  generateKeyPairSync,
  hkdfSync,
  type KeyObject,
} from 'node:crypto'
import type { MaskStream } from '../method/mask'
import { RAW_KEY } from './keys'

export interface MaskKeys {
  privateKey: KeyObject
  /** base64url of the raw 32 bytes. */
  publicKey: string
}

/** One start of one agent, as both ends of a link name it. */
export interface MaskEnd {
  agentId: string
  incarnation: string
  publicKey: string
}

/** An X25519 key pair for one start of an agent; it is never kept. */
export function generateMaskKeys(): MaskKeys {
  const { privateKey, publicKey } = generateKeyPairSync('x25519')
  const { x } = publicKey.export({ format: 'jwk' })
  if (typeof x !== 'string') throw new TypeError('not an X25519 key')
  return { privateKey, publicKey: x }
}

/**
 * The stream of a pair: AES-256 in counter mode under a key that HKDF-SHA-256 (RFC 5869) makes of both ends' X25519 keys (RFC 7748), bound
 * to who they are and to these starts of theirs. The counter begins at the round's number in the upper half, so that no two
 * rounds share a block.
 * @returns null for what is no key, or one of those whose secret is always the same
 */
export function pairStream(own: MaskEnd, privateKey: KeyObject, peer: MaskEnd): MaskStream | null {
  const key = pairKey(own, privateKey, peer)
  if (!key) return null
  return (round, entries) => {
    const counter = Buffer.alloc(16)
    counter.writeBigUInt64BE(BigInt(round), 0)
    const bytes = createCipheriv('aes-256-ctr', key, counter).update(Buffer.alloc(8 * entries))
    return BigUint64Array.from({ length: entries }, (_, index) => bytes.readBigUInt64LE(8 * index))
  }
}

function pairKey(own: MaskEnd, privateKey: KeyObject, peer: MaskEnd): Buffer | null {
  if (!RAW_KEY.test(peer.publicKey)) return null
  try {
    const publicKey = createPublicKey({
      key: { kty: 'OKP', crv: 'X25519', x: peer.publicKey },
      format: 'jwk',
    })
    const shared = diffieHellman({ privateKey, publicKey })
    const [one, other] = [own, peer].map(({ agentId, incarnation, publicKey: key }) =>
      [agentId, incarnation, key].join(' '),
    ) as [string, string]
    const info = `thinspan-mask\n${one < other ? `${one}\n${other}` : `${other}\n${one}`}`
    return Buffer.from(hkdfSync('sha256', shared, Buffer.alloc(0), Buffer.from(info, 'utf8'), 32))
  } catch {
    return null
  }
}
