import { type AddressInfo, connect, createServer, type Server, type Socket } from 'node:net'

/** A cable that may be pulled: TCP connections to one port, which end when told to. */
export class FlakyProxy {
  /** Connections it has ended so far. */
  cuts = 0
  /** While true, whoever knocks is turned away. */
  isDown = false
  readonly #targetPort: number
  readonly #pairs = new Set<[Socket, Socket]>()
  readonly #server: Server

  constructor({ targetPort }: { targetPort: number }) {
    this.#targetPort = targetPort
    this.#server = createServer((dialer) => this.#carry(dialer))
  }

  /** @returns the address to dial in the target's place */
  async start(): Promise<string> {
    await new Promise<void>((resolve) => this.#server.listen(0, '127.0.0.1', resolve))
    return `ws://127.0.0.1:${(this.#server.address() as AddressInfo).port}`
  }

  /** Ends every connection without a word, as a reset. */
  cut(): void {
    for (const pair of [...this.#pairs]) {
      this.cuts += 1
      for (const socket of pair) socket.resetAndDestroy()
    }
  }

  async stop(): Promise<void> {
    this.cut()
    await new Promise((resolve) => this.#server.close(resolve))
  }

  #carry(dialer: Socket): void {
    if (this.isDown) {
      dialer.resetAndDestroy()
      return
    }
    const target = connect(this.#targetPort, '127.0.0.1')
    const pair: [Socket, Socket] = [dialer, target]
    this.#pairs.add(pair)
    for (const [from, to] of [pair, [target, dialer]] as const) {
      from.setNoDelay(true)
      from.pipe(to)
      from.on('error', () => to.destroy())
      from.on('close', () => {
        this.#pairs.delete(pair)
        to.destroy()
      })
    }
  }
}
