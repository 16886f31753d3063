import { type Connection, createWsTransport } from '@/agent'
import {
  Handshake,
  type HandshakeEffect,
  type HandshakeInit,
  type PassClaims,
  signBytes,
} from '@/lib/protocol'
import { realClock } from './link-end'
import { freshNonce, type Identity, NOW_SECONDS } from './passes'

/** Someone who dials an agent and says whatever a test wants. */
export class Stranger {
  readonly connection: Connection
  readonly received: Uint8Array[] = []
  readonly closed: Promise<{ code: number; reason: string }>
  private wake: () => void = () => {}

  static async dial(address: string): Promise<Stranger> {
    const result = await createWsTransport({ clock: realClock }).dial(address, new AbortController().signal)
    if (!result.ok) throw new Error(result.reason)
    return new Stranger(result.connection)
  }

  private constructor(connection: Connection) {
    this.connection = connection
    this.closed = new Promise((resolve) => {
      connection.attach({
        message: (bytes) => {
          this.received.push(bytes)
          this.wake()
        },
        closed: (event) => {
          resolve(event)
          this.wake()
        },
      })
    })
  }

  send(bytes: Uint8Array): void {
    this.connection.send(bytes)
  }

  async message(index: number): Promise<Uint8Array> {
    while (this.received.length <= index) {
      await new Promise<void>((resolve) => {
        this.wake = resolve
      })
    }
    return this.received[index]!
  }

  /** Goes through the handshake as `identity`, believing whatever the other end says of itself. */
  async greet(identity: Identity, over: Partial<HandshakeInit> = {}): Promise<void> {
    const handshake = new Handshake(
      { sign: (bytes) => signBytes(identity.keys.privateKey, bytes) },
      {
        role: 'dialer',
        agentId: identity.agentId,
        key: identity.keys.publicKey,
        pass: identity.pass,
        incarnation: `incarnation-${identity.agentId}`,
        nonce: freshNonce(),
        ...over,
      },
    )
    const send = (effects: readonly HandshakeEffect[]) => {
      for (const effect of effects) if (effect.kind === 'send') this.send(effect.bytes)
    }
    send(handshake.start())
    send(handshake.receive(await this.message(0)))
    const claims: PassClaims = {
      overlayId: '',
      agentId: 'whoever-listens',
      name: '',
      key: helloKey(await this.message(0)),
      issuedAt: 0,
      expiresAt: NOW_SECONDS + 9,
    }
    send(handshake.passJudged({ ok: true, claims }))
  }
}

function helloKey(hello: Uint8Array): string {
  const { key } = JSON.parse(new TextDecoder().decode(hello.subarray(1)))
  return key
}
