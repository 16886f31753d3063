/** A small overlay such as yours: TCP between its nodes, gossip of tide levels over it. It knows nothing of agents. */
import { createConnection, createServer, type Server, type Socket } from 'node:net'
import { type Message, Splitter } from './splitter'

/** Which part of the program a message is for. */
export const CHANNEL = { hello: 0, tide: 1, agent: 2 } as const

/** The other end of one of the overlay's connections. */
export interface OverlayPeer {
  readonly name: string
  /** Whether this end opened the connection. */
  readonly openedHere: boolean
  /** Bytes that TCP has not taken yet. */
  readonly waitingBytes: number
  send(channel: number, bytes: Uint8Array): void
}

export interface OverlayNodeInit {
  name: string
  host: string
  /** 0 for any that is free. */
  port: number
}

interface Listeners {
  opened(peer: OverlayPeer): void
  message(peer: OverlayPeer, channel: number, bytes: Uint8Array): void
  closed(peer: OverlayPeer): void
}

export class OverlayNode {
  readonly name: string
  /** The last tide level heard of each node, in centimetres. */
  readonly tides = new Map<string, number>()
  readonly #init: OverlayNodeInit
  readonly #server: Server
  readonly #sockets = new Set<Socket>()
  readonly #peers = new Map<string, OverlayPeer>()
  readonly #listeners: Partial<Listeners>[] = []

  constructor(init: OverlayNodeInit) {
    this.name = init.name
    this.#init = init
    this.#server = createServer((socket) => this.#open(socket, false))
  }

  /** Who is told what the overlay's connections do, those that are open already included. */
  watch(listeners: Partial<Listeners>): void {
    this.#listeners.push(listeners)
    for (const peer of this.#peers.values()) listeners.opened?.(peer)
  }

  /** @returns the port taken */
  start(): Promise<number> {
    return new Promise((resolve, reject) => {
      this.#server.once('error', reject)
      this.#server.listen(this.#init.port, this.#init.host, () => {
        const bound = this.#server.address()
        resolve(bound !== null && typeof bound === 'object' ? bound.port : this.#init.port)
      })
    })
  }

  connect(host: string, port: number): void {
    this.#open(createConnection({ host, port }), true)
  }

  /** Ends the connection with a peer, as a pulled cable would. */
  disconnect(name: string): void {
    for (const peer of this.#peers.values()) if (peer.name === name && peer instanceof TcpPeer) peer.cut()
  }

  get neighbours(): string[] {
    return [...this.#peers.keys()].sort()
  }

  tellTide(centimetres: number): void {
    this.tides.set(this.name, centimetres)
    const text = Buffer.from(`${this.name} ${centimetres}`)
    for (const peer of this.#peers.values()) peer.send(CHANNEL.tide, text)
  }

  stop(): void {
    this.#server.close()
    for (const socket of this.#sockets) socket.destroy()
  }

  #open(socket: Socket, openedHere: boolean): void {
    const splitter = new Splitter()
    let peer: TcpPeer | null = null
    this.#sockets.add(socket)
    socket.on('error', () => {})
    socket.on('close', () => {
      this.#sockets.delete(socket)
      if (peer === null || this.#peers.get(peer.name) !== peer) return
      this.#peers.delete(peer.name)
      for (const { closed } of this.#listeners) closed?.(peer)
    })
    const take = ({ channel, bytes }: Message) => {
      if (peer !== null) this.#receive(peer, channel, bytes)
      else if (channel === CHANNEL.hello) {
        peer = new TcpPeer(socket, Buffer.from(bytes).toString('utf8'), openedHere)
        this.#peers.set(peer.name, peer)
        for (const { opened } of this.#listeners) opened?.(peer)
      }
    }
    socket.on('data', (chunk) => {
      const messages = splitter.split(chunk)
      // Whoever sends more than any node sends is no node.
      if (messages === null) socket.destroy()
      else for (const message of messages) take(message)
    })
    socket.write(Splitter.join(CHANNEL.hello, Buffer.from(this.name)))
  }

  #receive(peer: OverlayPeer, channel: number, bytes: Uint8Array): void {
    if (channel === CHANNEL.tide) {
      const [name = '', level = ''] = Buffer.from(bytes).toString('utf8').split(' ')
      this.tides.set(name, Number(level))
    }
    for (const { message } of this.#listeners) message?.(peer, channel, bytes)
  }
}

class TcpPeer implements OverlayPeer {
  readonly name: string
  readonly openedHere: boolean
  readonly #socket: Socket

  constructor(socket: Socket, name: string, openedHere: boolean) {
    this.#socket = socket
    this.name = name
    this.openedHere = openedHere
  }

  get waitingBytes(): number {
    return this.#socket.writableLength
  }

  send(channel: number, bytes: Uint8Array): void {
    if (this.#socket.writable) this.#socket.write(Splitter.join(channel, bytes))
  }

  cut(): void {
    this.#socket.destroy()
  }
}
