import { type AddressInfo, connect, createServer, type Server, type Socket } from 'node:net'

/** Passes TCP connections on to one port and counts what crosses: payload, with the WebSocket headers, without TCP's. */
export class CountingProxy {
  connections = 0
  /** From the dialing side to the port, and back. */
  bytesIn = 0
  bytesOut = 0
  private readonly sockets = new Set<Socket>()
  private readonly server: Server

  constructor({ targetPort }: { targetPort: () => number }) {
    this.server = createServer((dialer) => {
      const target = connect(targetPort(), '127.0.0.1')
      this.connections += 1
      dialer.on('data', (chunk) => {
        this.bytesIn += chunk.length
      })
      target.on('data', (chunk) => {
        this.bytesOut += chunk.length
      })
      for (const [one, other] of [
        [dialer, target],
        [target, dialer],
      ] as const) {
        one.setNoDelay(true)
        this.sockets.add(one)
        one.pipe(other)
        one.on('error', () => other.destroy())
        one.on('close', () => {
          this.sockets.delete(one)
          other.destroy()
        })
      }
      dialer.on('close', () => {
        this.connections -= 1
      })
    })
  }

  async start(): Promise<number> {
    await new Promise<void>((resolve) => this.server.listen(0, '127.0.0.1', resolve))
    return (this.server.address() as AddressInfo).port
  }

  async stop(): Promise<void> {
    for (const socket of this.sockets) socket.destroy()
    await new Promise((resolve) => this.server.close(resolve))
  }
}
