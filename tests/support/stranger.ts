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
import { Bell, within } from './until'

/** Someone who dials an agent and says whatever a test wants. */
export class Stranger {
  readonly connection: Connection
  readonly received: Uint8Array[] = []
  private readonly ended: Promise<{ code: number; reason: string }>
  private end: { code: number; reason: string } | null = null
  private readonly bell = new Bell()

  static async dial(address: string): Promise<Stranger> {
    const result = await createWsTransport({ clock: realClock }).dial(address, new AbortController().signal)
    if (!result.ok) throw new Error(result.reason)
    return new Stranger(result.connection)
  }

  private constructor(connection: Connection) {
    this.connection = connection
    this.ended = new Promise((resolve) => {
      connection.attach({
        message: (bytes) => {
          this.received.push(bytes)
          this.bell.ring()
        },
        closed: (event) => {
          this.end = event
          resolve(event)
          this.bell.ring()
        },
      })
    })
  }

  get closed(): Promise<{ code: number; reason: string }> {
    return within('the end of the connection', this.ended)
  }

  send(bytes: Uint8Array): void {
    this.connection.send(bytes)
  }

  /** @throws where the connection has ended without it */
  async message(index: number): Promise<Uint8Array> {
    await this.bell.until(() => this.received.length > index || this.end !== null)
    const message = this.received[index]
    if (!message) throw new Error(`Closed before message ${index}: ${JSON.stringify(this.end)}`)
    return message
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
