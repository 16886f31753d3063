import type { MaskStream } from '@/lib/method/mask'
import { type LinkPeer, type MaskEnd, type MaskKeys, pairStream } from '@/lib/protocol'

/** Starts of peers whose secrets are kept: rounds are over long before. */
const MOST_KEPT = 4_096

/** The secrets this start of the agent shares with starts of its neighbours, by what their handshakes said. */
export class MaskSecrets {
  readonly publicKey: string
  private readonly keys: MaskKeys
  private readonly own: MaskEnd
  private readonly streams = new Map<string, MaskStream | null>()

  constructor(keys: MaskKeys, own: Omit<MaskEnd, 'publicKey'>) {
    this.keys = keys
    this.publicKey = keys.publicKey
    this.own = { ...own, publicKey: keys.publicKey }
  }

  /** A handshake has proved a peer. The first key of a start stays: all its connections say the same. */
  note({ agentId, incarnation, mask }: LinkPeer): void {
    const name = nameOf(agentId, incarnation)
    if (mask === null || this.streams.has(name)) return
    this.streams.set(
      name,
      pairStream(this.own, this.keys.privateKey, { agentId, incarnation, publicKey: mask }),
    )
    const [oldest] = this.streams.keys()
    if (this.streams.size > MOST_KEPT && oldest !== undefined) this.streams.delete(oldest)
  }

  of(peer: string, incarnation: string): MaskStream | null {
    return this.streams.get(nameOf(peer, incarnation)) ?? null
  }
}

const nameOf = (agentId: string, incarnation: string): string => `${agentId} ${incarnation}`
