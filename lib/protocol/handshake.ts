import { createHash } from 'node:crypto'
import type { CloseName } from './close-codes'
import { decodeHello, encodeHello, type Hello } from './hello'
import { SIGNATURE_BYTES, verifyBytes } from './keys'
import { MAX_HANDSHAKE_BYTES } from './limits'
import { LINK_VERSIONS, MESSAGE_KIND } from './message-kind'
import type { ProvenNonces } from './nonces'
import type { PassClaims, PassResult } from './pass'

export type LinkRole = 'dialer' | 'listener'

/** The other end of an established link: what its pass says, and which start of it this is. */
export interface LinkPeer {
  agentId: string
  name: string
  key: string
  incarnation: string
  version: number
  /** Its X25519 key of this start, where it said one. */
  mask: string | null
  /** Seconds since 1970. */
  passExpiresAt: number
}

export type HandshakeEffect =
  | { kind: 'send'; bytes: Uint8Array }
  /** The caller judges the pass (see `verifyPass`) and answers with `passJudged`. */
  | { kind: 'judge-pass'; token: string }
  | { kind: 'established'; peer: LinkPeer }
  | { kind: 'failed'; close: CloseName; detail: string }

export interface HandshakeComponents {
  /** Ed25519 signature with the agent's own key. */
  sign: (bytes: Uint8Array) => Uint8Array
  /** Shared by all exchanges of this agent: a recording is told by them. It could not prove itself without either. */
  nonces?: ProvenNonces
}

export interface HandshakeInit {
  role: LinkRole
  agentId: string
  key: string
  pass: string
  incarnation: string
  /** base64url of 32 fresh random bytes. */
  nonce: string
  /** Own X25519 key of this start: both proofs cover it, as they do all of both hellos. */
  mask?: string
  /** The agent that must answer, where the caller knows it. */
  expectedPeer?: string
  versions?: readonly number[]
}

/**
 * One end of a link's handshake, as a machine without I/O. Both ends send a hello at once; each then signs the
 * hashes of both hellos and its own role. Nonces of both ends are fresh and both are signed, so that no proof can
 * be replayed, spliced into another exchange or reflected. On an ordered connection frames follow the other end's
 * proof, never precede it.
 */
export class Handshake {
  private readonly sign: HandshakeComponents['sign']
  private readonly nonces: ProvenNonces | undefined
  private readonly init: HandshakeInit
  private readonly ownHello: Uint8Array
  private state: 'hello' | 'pass' | 'proof' | 'over' = 'hello'
  private peerHello: { hello: Hello; bytes: Uint8Array; version: number } | null = null
  private peerClaims: PassClaims | null = null
  private earlyProof: Uint8Array | null = null

  constructor({ sign, nonces }: HandshakeComponents, init: HandshakeInit) {
    this.sign = sign
    this.nonces = nonces
    this.init = init
    this.ownHello = encodeHello({
      versions: [...(init.versions ?? LINK_VERSIONS)],
      key: init.key,
      pass: init.pass,
      incarnation: init.incarnation,
      nonce: init.nonce,
      ...(init.mask !== undefined && { mask: init.mask }),
    })
  }

  start(): HandshakeEffect[] {
    return [{ kind: 'send', bytes: this.ownHello }]
  }

  receive(bytes: Uint8Array): HandshakeEffect[] {
    if (this.state === 'over') return []
    if (bytes.length > MAX_HANDSHAKE_BYTES) {
      return this.fail('too-large', `${bytes.length} bytes before the proof`)
    }
    if (this.state === 'hello') return this.receiveHello(bytes)
    if (this.state === 'proof') return this.receiveProof(bytes)
    // The peer judged our pass faster than we judge its own: its proof waits, anything more is not the protocol.
    if (this.earlyProof) return this.fail('proof-wrong', 'more than a proof before the pass was judged')
    this.earlyProof = bytes
    return []
  }

  private receiveHello(bytes: Uint8Array): HandshakeEffect[] {
    const hello = decodeHello(bytes)
    if (!hello) return this.fail('not-a-hello', `${bytes.length} bytes that are no hello`)
    const spoken = this.init.versions ?? LINK_VERSIONS
    const version = Math.max(0, ...hello.versions.filter((candidate) => spoken.includes(candidate)))
    if (version === 0) {
      return this.fail('version-mismatch', `${hello.versions.join(', ')} there, ${spoken.join(', ')} here`)
    }
    if (this.nonces?.has(hello.nonce)) return this.fail('replayed', 'the nonce of an earlier exchange')
    this.peerHello = { hello, bytes, version }
    this.state = 'pass'
    return [{ kind: 'judge-pass', token: hello.pass }]
  }

  passJudged(result: PassResult): HandshakeEffect[] {
    if (this.state !== 'pass' || !this.peerHello) return []
    if (!result.ok) return this.fail(result.error.code, describe(result))
    const { claims } = result
    if (claims.key !== this.peerHello.hello.key) {
      return this.fail('pass-of-another-agent', `the pass of ${claims.agentId} with another key`)
    }
    if (claims.agentId === this.init.agentId) return this.fail('own-id', 'the peer is this agent itself')
    if (this.init.expectedPeer !== undefined && claims.agentId !== this.init.expectedPeer) {
      return this.fail('unexpected-agent', `${claims.agentId} instead of ${this.init.expectedPeer}`)
    }
    this.peerClaims = claims
    this.state = 'proof'
    const proof = encodeProof(this.sign(this.statement(this.init.role, this.peerHello.bytes)))
    const effects: HandshakeEffect[] = [{ kind: 'send', bytes: proof }]
    return this.earlyProof ? [...effects, ...this.receiveProof(this.earlyProof)] : effects
  }

  private receiveProof(bytes: Uint8Array): HandshakeEffect[] {
    const peer = this.peerHello!
    const claims = this.peerClaims!
    const peerRole = this.init.role === 'dialer' ? 'listener' : 'dialer'
    const proven =
      bytes[0] === MESSAGE_KIND.proof &&
      verifyBytes(claims.key, this.statement(peerRole, peer.bytes), bytes.subarray(1))
    if (!proven) return this.fail('proof-wrong', 'the proof is not a signature of this exchange')
    this.nonces?.add(peer.hello.nonce)
    this.state = 'over'
    return [
      {
        kind: 'established',
        peer: {
          agentId: claims.agentId,
          name: claims.name,
          key: claims.key,
          incarnation: peer.hello.incarnation,
          version: peer.version,
          mask: peer.hello.mask ?? null,
          passExpiresAt: claims.expiresAt,
        },
      },
    ]
  }

  /** What the end in `signer`'s role signs: both hellos in the order dialer, listener. */
  private statement(signer: LinkRole, peerHello: Uint8Array): Uint8Array {
    const [dialer, listener] =
      this.init.role === 'dialer' ? [this.ownHello, peerHello] : [peerHello, this.ownHello]
    return linkStatement(signer, dialer, listener)
  }

  private fail(close: CloseName, detail: string): HandshakeEffect[] {
    this.state = 'over'
    return [{ kind: 'failed', close, detail }]
  }
}

export function linkStatement(
  signer: LinkRole,
  dialerHello: Uint8Array,
  listenerHello: Uint8Array,
): Uint8Array {
  return Buffer.concat([Buffer.from(`thinspan-link\n${signer}`), sha256(dialerHello), sha256(listenerHello)])
}

export function encodeProof(signature: Uint8Array): Uint8Array {
  if (signature.length !== SIGNATURE_BYTES) throw new RangeError(`a signature of ${signature.length} bytes`)
  return Buffer.concat([Buffer.from([MESSAGE_KIND.proof]), signature])
}

const sha256 = (bytes: Uint8Array): Buffer => createHash('sha256').update(bytes).digest()

function describe(result: PassResult & { ok: false }): string {
  const { error } = result
  if (error.code === 'pass-expired') return `expired at ${new Date(error.expiredAt * 1000).toISOString()}`
  if (error.code === 'pass-of-another-overlay') return `for overlay ${error.overlayId}`
  return error.reason
}
