import {
  CLOSE,
  type CloseName,
  Handshake,
  type HandshakeEffect,
  type HandshakeInit,
  type LinkPeer,
  type PassResult,
  type ProvenNonces,
} from '@/lib/protocol'
import type { Clock } from '../clock'
import type { CloseEvent, Connection } from '../transport/transport'

/** Frames wait no longer behind more than this; their totals come again with the next one. */
export const MAX_BUFFERED_BYTES = 256 * 1024

export interface SessionComponents {
  clock: Clock
  connection: Connection
  sign: (bytes: Uint8Array) => Uint8Array
  judgePass: (token: string) => Promise<PassResult>
  nonces?: ProvenNonces
}

export interface SessionInit extends HandshakeInit {
  timeoutMs: number
  /** Counts this program's connections in the order they were opened. */
  opened: number
}

export interface SessionOwner {
  established(session: LinkSession, peer: LinkPeer): void
  message(session: LinkSession, peer: LinkPeer, bytes: Uint8Array): void
  /** Once, and last. `own` names the failure where this end closed. */
  closed(session: LinkSession, event: CloseEvent, own: CloseName | null): void
}

/** One connection: the handshake, then messages of a proven peer. */
export class LinkSession {
  readonly opened: number
  readonly role: HandshakeInit['role']
  readonly remote: string
  peer: LinkPeer | null = null
  lastHeardMs: number
  /** The pass that this end showed last. */
  shown: string
  /** A renewed pass of the other end is being judged. */
  isJudging = false
  private readonly clock: Clock
  private readonly connection: Connection
  private readonly judgePass: SessionComponents['judgePass']
  private readonly handshake: Handshake
  private readonly timeoutMs: number
  private readonly owner: SessionOwner
  private closing: CloseName | null = null
  private ended = false
  private cancelTimeout = () => {}

  constructor(
    { clock, connection, sign, judgePass, nonces }: SessionComponents,
    init: SessionInit,
    owner: SessionOwner,
  ) {
    this.clock = clock
    this.connection = connection
    this.judgePass = judgePass
    this.handshake = new Handshake({ sign, nonces }, init)
    this.timeoutMs = init.timeoutMs
    this.opened = init.opened
    this.role = init.role
    this.remote = connection.remote
    this.shown = init.pass
    this.owner = owner
    this.lastHeardMs = clock.monotonicMs()
  }

  start(): void {
    this.cancelTimeout = this.clock.after(this.timeoutMs, () =>
      this.close('handshake-timeout', `no proof within ${this.timeoutMs} ms`),
    )
    this.connection.attach({
      message: (bytes) => this.receive(bytes),
      closed: (event) => {
        this.ended = true
        this.cancelTimeout()
        this.owner.closed(this, event, this.closing)
      },
    })
    this.act(this.handshake.start())
  }

  get isOpen(): boolean {
    return this.peer !== null && !this.isOver
  }

  /** A pass may still be judged, or a message be on its way, when the connection is closing or gone. */
  private get isOver(): boolean {
    return this.ended || this.closing !== null
  }

  /** @returns false where the frame was left out because too many bytes wait already */
  send(bytes: Uint8Array): boolean {
    if (this.connection.bufferedBytes > MAX_BUFFERED_BYTES) return false
    this.connection.send(bytes)
    return true
  }

  close(name: CloseName, detail = ''): void {
    if (this.isOver) return
    this.closing = name
    this.cancelTimeout()
    const { code, sentence } = CLOSE[name]
    this.connection.close(code, detail ? `${sentence} (${detail})` : sentence)
  }

  private receive(bytes: Uint8Array): void {
    if (this.isOver) return
    if (!this.peer) {
      this.act(this.handshake.receive(bytes))
      return
    }
    this.lastHeardMs = this.clock.monotonicMs()
    this.owner.message(this, this.peer, bytes)
  }

  private act(effects: readonly HandshakeEffect[]): void {
    for (const effect of effects) {
      if (this.isOver) return
      switch (effect.kind) {
        case 'send':
          this.connection.send(effect.bytes)
          break
        case 'judge-pass':
          void this.judgePass(effect.token).then((result) => this.act(this.handshake.passJudged(result)))
          break
        case 'failed':
          this.close(effect.close, effect.detail)
          break
        case 'established':
          this.cancelTimeout()
          this.peer = effect.peer
          this.lastHeardMs = this.clock.monotonicMs()
          this.owner.established(this, effect.peer)
      }
    }
  }
}
