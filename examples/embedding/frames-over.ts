/** Carries an agent's frames over connections that an overlay has anyway. */
import { type Connection, type ConnectionListener, LOST_CODE, type Transport } from '../../agent'
import { CHANNEL, type OverlayNode, type OverlayPeer } from './overlay-node'

// shown from here
const OPEN = 0
const FRAME = 1
const CLOSE = 2

/** Where the agent finds a peer of the overlay. */
export const addressOf = (name: string): string => `overlay:${name}`

/** A transport over the overlay's own connections: at most one link on each, opened by whoever opened the connection. */
export function framesOver(overlay: OverlayNode): Transport {
  const peers = new Map<string, OverlayPeer>()
  const links = new Map<OverlayPeer, CarriedLink>()
  let accept: (connection: Connection) => void = () => {}

  function begin(peer: OverlayPeer): CarriedLink {
    links.get(peer)?.end({ code: LOST_CODE, reason: 'begun anew' })
    const link = new CarriedLink(peer, () => links.delete(peer))
    links.set(peer, link)
    return link
  }

  overlay.watch({
    opened: (peer) => peers.set(addressOf(peer.name), peer),
    closed: (peer) => {
      if (peers.get(addressOf(peer.name)) === peer) peers.delete(addressOf(peer.name))
      links.get(peer)?.end({ code: LOST_CODE, reason: 'the connection is gone' })
    },
    message: (peer, channel, bytes) => {
      if (channel !== CHANNEL.agent) return
      if (bytes[0] === OPEN) accept(begin(peer))
      else if (bytes[0] === FRAME) links.get(peer)?.message(bytes.slice(1))
      else if (bytes[0] === CLOSE) links.get(peer)?.end(readClose(bytes))
    },
  })

  return {
    listen: async (_where, onConnection) => {
      accept = onConnection
      const close = async () => {
        accept = () => {}
      }
      return { address: addressOf(overlay.name), port: 0, close }
    },
    dial: async (address) => {
      const peer = peers.get(address)
      if (!peer) return { ok: false, reason: `the overlay has no connection to ${address}` }
      peer.send(CHANNEL.agent, Uint8Array.of(OPEN))
      return { ok: true, connection: begin(peer) }
    },
  }
}

class CarriedLink implements Connection {
  readonly remote: string
  private listener: ConnectionListener | null = null
  private ended = false
  /** What came before anyone listened. */
  private early: Uint8Array[] = []

  constructor(
    private readonly peer: OverlayPeer,
    private readonly forget: () => void,
  ) {
    this.remote = addressOf(peer.name)
  }

  get bufferedBytes(): number {
    return this.peer.waitingBytes
  }

  attach(listener: ConnectionListener): void {
    this.listener = listener
    for (const bytes of this.early.splice(0)) listener.message(bytes)
  }

  send(bytes: Uint8Array): void {
    if (!this.ended) this.peer.send(CHANNEL.agent, Buffer.concat([Uint8Array.of(FRAME), bytes]))
  }

  close(code: number, reason: string): void {
    if (this.ended) return
    this.peer.send(CHANNEL.agent, Buffer.from([CLOSE, code >> 8, code & 255, ...Buffer.from(reason)]))
    this.end({ code, reason })
  }

  message(bytes: Uint8Array): void {
    if (this.listener) this.listener.message(bytes)
    else this.early.push(bytes)
  }

  end(event: { code: number; reason: string }): void {
    if (this.ended) return
    this.ended = true
    this.forget()
    // Not while whoever closed it is still at it.
    queueMicrotask(() => this.listener?.closed(event))
  }
}

function readClose(bytes: Uint8Array): { code: number; reason: string } {
  const message = Buffer.from(bytes)
  return { code: message.readUInt16BE(1), reason: message.toString('utf8', 3) }
}
