import fc from 'fast-check'
import { createRandom, type Random } from '@/lib/method/random'
import { encodeFrame, encodeHello, encodeProof, MESSAGE_KIND } from '@/lib/protocol'
import { anyFrame, anyFrameOfVersion1, someFrame, someOrders, someProof, someStatement } from './frames'
import { freshNonce, type Identity, type TestOverlay } from './passes'

/** Newer than any orders a victim holds, or they would be passed over unread. */
const LATER = 9_000_000

/** Bytes as an attacker may send them: from noise to what differs from an honest message in one bit. */
export class Fuzz {
  private readonly random: Random
  private readonly frames: readonly Uint8Array[]

  constructor(overlay: TestOverlay, seed: string) {
    this.random = createRandom(seed)
    const orders = someOrders(7)
    const signed = overlay.sign(orders)
    const later = someOrders(LATER)
    const forged = { ...overlay.sign(later), signature: signed.signature }
    const kind = (byte: number, text: string) => Buffer.concat([Buffer.from([byte]), Buffer.from(text)])
    this.frames = [
      encodeFrame(someFrame()),
      encodeFrame(someFrame({ statement: someStatement() })),
      encodeFrame(someFrame({ orders: { orders, ageMs: 12, proof: someProof(orders) } })),
      encodeFrame(someFrame({ ordersSequence: LATER, orders: { orders, ageMs: 1, proof: signed } })),
      encodeFrame(someFrame({ ordersSequence: LATER, orders: { orders: later, ageMs: 1, proof: forged } })),
      kind(MESSAGE_KIND.pass, 'no.pass.atall'),
      kind(MESSAGE_KIND.relay, '{"hops":3,"report":{}}'),
      kind(MESSAGE_KIND.relayReply, '{}'),
      ...fc.sample(anyFrame, { numRuns: 60, seed: 11 }).map((frame) => encodeFrame(frame)),
      ...fc.sample(anyFrameOfVersion1, { numRuns: 10, seed: 12 }).map((frame) => encodeFrame(frame, 1)),
      // Of a colony that the victim follows, so that ledgers are reached.
      ...Array.from({ length: 30 }, (_, index) =>
        encodeFrame(
          someFrame({
            number: 1 + ((index * 7) % 30),
            heardNumber: 0,
            colonies: [0, 1].map((slot) => this.colony(slot, index)),
          }),
        ),
      ),
    ]
  }

  private colony(colony: number, index: number) {
    const received = { receivedX: 0, receivedY: 0 }
    const sent = { sentX: index * 1_000_003, sentY: index % 3 === 0 ? 0 : index * 7 }
    return {
      colony,
      seeding: 1_000 + colony,
      refused: index % 7 === 0,
      meanOccupancy: index,
      ...sent,
      ...received,
    }
  }

  below(limit: number): number {
    return Math.floor(this.random.uniform() * limit)
  }

  chance(share: number): boolean {
    return this.random.uniform() < share
  }

  noise(mostBytes: number): Uint8Array {
    const bytes = new Uint8Array(this.below(mostBytes))
    for (let at = 0; at < bytes.length; at++) bytes[at] = this.random.uint32() & 0xff
    return bytes
  }

  mutated(bytes: Uint8Array): Uint8Array {
    const copy = Uint8Array.from(bytes)
    for (let change = this.below(4); change >= 0; change--) copy[this.below(copy.length)] = this.below(256)
    if (this.chance(0.1)) return copy.subarray(0, this.below(copy.length))
    return this.chance(0.05) ? Buffer.concat([copy, this.noise(40)]) : copy
  }

  /** A message for a link: honest, nearly so, or noise. `honesty` is the share of the first. */
  message(honesty = 0.35): Uint8Array {
    const chosen = this.frames[this.below(this.frames.length)] ?? new Uint8Array()
    if (this.chance(honesty)) return chosen
    if (this.chance(0.8)) return this.mutated(chosen)
    const bytes = this.noise(300)
    if (bytes.length > 2 && this.chance(0.7)) bytes.set([3, 2])
    return bytes
  }

  /** Messages for a connection that has not proved itself; with `isTooLarge` the first is longer than any may be. */
  handshake(identity: Identity, isTooLarge: boolean): Uint8Array[] {
    const hello = encodeHello({
      versions: [2, 1],
      key: identity.keys.publicKey,
      pass: identity.pass,
      incarnation: `incarnation-${this.below(1_000_000)}`,
      nonce: freshNonce(),
    })
    const proof = encodeProof(Uint8Array.from({ length: 64 }, () => this.below(256)))
    const spoken = [hello, proof, this.message(), Uint8Array.from([0, ...this.noise(100)])]
    const messages = Array.from({ length: 1 + this.below(4) }, (_, index) =>
      this.chance(0.5) ? (spoken[index] ?? hello) : this.mutated(spoken[this.below(4)] ?? hello),
    )
    if (isTooLarge) messages.unshift(new Uint8Array(9_000 + this.below(9_000)).fill(MESSAGE_KIND.hello))
    return messages
  }
}
