import { MAX_FRAME_BYTES } from '@/lib/protocol'
import type { Clock } from '../clock'
import { Inbox } from './inbox'
import { type Connection, LOST_CODE, type Transport } from './transport'

/** A message on its way. `index` counts the messages of this direction of this connection, from 0. */
export interface Passage {
  from: string
  to: string
  bytes: Uint8Array
  index: number
}

/** When the copies of a message arrive, in milliseconds: none loses it, two repeat it, unequal ones reorder. */
export type Weather = (passage: Passage) => readonly number[]

export const FAIR_WEATHER: Weather = () => [0]

interface Wire {
  readonly ends: readonly [MemoryEnd, MemoryEnd]
}

/** Programs connected by memory instead of sockets, on any clock, with whatever weather a test orders. */
export class MemoryNetwork {
  weather: Weather
  private readonly clock: Clock
  private readonly listeners = new Map<string, { name: string; accept: (connection: Connection) => void }>()
  private readonly wires = new Set<Wire>()
  private ports = 0

  constructor({ clock }: { clock: Clock }, init: { weather?: Weather } = {}) {
    this.clock = clock
    this.weather = init.weather ?? FAIR_WEATHER
  }

  /** The transport of one program; `name` tells it apart in the weather. */
  transport(name: string): Transport {
    return {
      listen: async ({ host, port }, onConnection) => {
        const taken = port === 0 ? 1_024 + ++this.ports : port
        const address = `memory://${host}:${taken}`
        if (this.listeners.has(address)) throw new Error(`${address} is taken`)
        this.listeners.set(address, { name, accept: onConnection })
        return { address, port: taken, close: async () => void this.listeners.delete(address) }
      },
      dial: async (address, signal) => {
        if (signal.aborted) return { ok: false, reason: 'aborted' }
        const listener = this.listeners.get(address)
        if (!listener) return { ok: false, reason: `nothing listens at ${address}` }
        const dialed = this.connect(name, listener.name)
        listener.accept(dialed.ends[1])
        return { ok: true, connection: dialed.ends[0] }
      },
    }
  }

  /** Breaks connections as a pulled cable does. @returns how many */
  cut(chosen: (a: string, b: string) => boolean): number {
    let broken = 0
    for (const wire of [...this.wires]) {
      const [a, b] = wire.ends
      if (!chosen(a.name, b.name) && !chosen(b.name, a.name)) continue
      this.forget(wire)
      a.end({ code: LOST_CODE, reason: '' })
      b.end({ code: LOST_CODE, reason: '' })
      broken += 1
    }
    return broken
  }

  get openConnections(): number {
    return this.wires.size
  }

  private connect(dialer: string, listener: string): Wire {
    const a = new MemoryEnd(dialer, listener)
    const b = new MemoryEnd(listener, dialer)
    const wire: Wire = { ends: [a, b] }
    a.carry = (bytes) => this.carry(wire, a, b, bytes)
    b.carry = (bytes) => this.carry(wire, b, a, bytes)
    a.hangUp = (code, reason) => this.hangUp(wire, a, b, code, reason)
    b.hangUp = (code, reason) => this.hangUp(wire, b, a, code, reason)
    this.wires.add(wire)
    return wire
  }

  private carry(wire: Wire, from: MemoryEnd, to: MemoryEnd, bytes: Uint8Array): void {
    if (bytes.length > MAX_FRAME_BYTES) {
      this.hangUp(wire, to, from, 1009, 'message too large')
      return
    }
    const copy = bytes.slice()
    const passage = { from: from.name, to: to.name, bytes: copy, index: from.carried++ }
    for (const delayMs of this.weather(passage)) this.clock.after(delayMs, () => to.inbox.message(copy))
  }

  /** The closing end is done at once; the other hears of it after what was sent before, in fair weather. */
  private hangUp(wire: Wire, from: MemoryEnd, to: MemoryEnd, code: number, reason: string): void {
    if (!this.forget(wire)) return
    this.clock.after(0, () => {
      from.end({ code, reason })
      to.end({ code, reason })
    })
  }

  private forget(wire: Wire): boolean {
    for (const end of wire.ends) end.open = false
    return this.wires.delete(wire)
  }
}

class MemoryEnd implements Connection {
  readonly name: string
  readonly remote: string
  readonly bufferedBytes = 0
  readonly inbox = new Inbox()
  open = true
  carried = 0
  carry: (bytes: Uint8Array) => void = () => {}
  hangUp: (code: number, reason: string) => void = () => {}

  constructor(name: string, remote: string) {
    this.name = name
    this.remote = remote
  }

  attach(listener: Parameters<Connection['attach']>[0]): void {
    this.inbox.attach(listener)
  }

  send(bytes: Uint8Array): void {
    if (this.open) this.carry(bytes)
  }

  close(code: number, reason: string): void {
    this.hangUp(code, reason)
  }

  end(event: { code: number; reason: string }): void {
    this.inbox.closed(event)
  }
}
