import type { AddressInfo } from 'node:net'
import { WebSocket, WebSocketServer } from 'ws'

/** What becomes of one message: its copies, perhaps cut short, each with its delay. None: it is lost. */
export type Meddling = (message: Uint8Array) => { bytes: Uint8Array; delayMs: number }[]

export const faithfully: Meddling = (bytes) => [{ bytes, delayMs: 0 }]

/** Stands between two agents and speaks WebSocket with both: messages may be lost, repeated, delayed, overtaken and cut. */
export class MeddlingRelay {
  meddling: Meddling = faithfully
  /** Messages that came, and that went on. */
  came = 0
  went = 0
  readonly #target: string
  readonly #timers = new Set<NodeJS.Timeout>()
  #server: WebSocketServer | null = null

  constructor({ target }: { target: string }) {
    this.#target = target
  }

  /** @returns the address to dial in the target's place */
  async start(): Promise<string> {
    const server = new WebSocketServer({ host: '127.0.0.1', port: 0, perMessageDeflate: false })
    this.#server = server
    server.on('connection', (dialer) => this.#carry(dialer))
    await new Promise((resolve) => server.once('listening', resolve))
    return `ws://127.0.0.1:${(server.address() as AddressInfo).port}`
  }

  async stop(): Promise<void> {
    for (const timer of this.#timers) clearTimeout(timer)
    for (const client of this.#server?.clients ?? []) client.terminate()
    await new Promise((resolve) => (this.#server ? this.#server.close(resolve) : resolve(null)))
  }

  #carry(dialer: WebSocket): void {
    const target = new WebSocket(this.#target, { perMessageDeflate: false })
    const waiting: Uint8Array[] = []
    dialer.on('message', (data) => {
      const bytes = bytesOf(data)
      if (target.readyState === WebSocket.CONNECTING) waiting.push(bytes)
      else this.#pass(bytes, target)
    })
    target.on('open', () => {
      for (const bytes of waiting) this.#pass(bytes, target)
    })
    target.on('message', (data) => this.#pass(bytesOf(data), dialer))
    for (const [one, other] of [
      [dialer, target],
      [target, dialer],
    ] as const) {
      one.on('error', () => other.terminate())
      one.on('close', (code, reason) => {
        // 1005 and 1006 say that no code came; they cannot be sent on (RFC 6455, section 7.4.1).
        if (other.readyState === WebSocket.OPEN && code >= 3000) other.close(code, reason)
        else other.terminate()
      })
    }
  }

  #pass(message: Uint8Array, to: WebSocket): void {
    this.came += 1
    for (const { bytes, delayMs } of this.meddling(message)) {
      const send = () => {
        if (to.readyState !== WebSocket.OPEN) return
        this.went += 1
        to.send(bytes)
      }
      if (delayMs === 0) {
        send()
        continue
      }
      const timer = setTimeout(() => {
        this.#timers.delete(timer)
        send()
      }, delayMs)
      this.#timers.add(timer)
    }
  }
}

function bytesOf(data: WebSocket.RawData): Uint8Array {
  if (Array.isArray(data)) return new Uint8Array(Buffer.concat(data))
  return new Uint8Array(data)
}
