import type { Connection, Transport } from '@/agent'

export interface LinkCounts {
  /** As they cross the socket: messages with their WebSocket headers (RFC 6455 §5.2), without TCP's and the opening request. */
  bytes: number
  messages: number
}

const MASK_BYTES = 4

/** Counts what crosses the connections that are dialed. */
export function countingTransport(inner: Transport, counts: LinkCounts): Transport {
  const note = (message: Uint8Array, maskBytes: number) => {
    counts.bytes += message.length + headerBytes(message.length) + maskBytes
    counts.messages += 1
  }
  const counted = (connection: Connection): Connection => ({
    remote: connection.remote,
    get bufferedBytes() {
      return connection.bufferedBytes
    },
    attach: (listener) =>
      connection.attach({
        message(bytes) {
          note(bytes, 0)
          listener.message(bytes)
        },
        closed: (event) => listener.closed(event),
      }),
    send(bytes) {
      note(bytes, MASK_BYTES)
      connection.send(bytes)
    },
    close: (code, reason) => connection.close(code, reason),
  })
  return {
    listen: (init, onConnection) => inner.listen(init, onConnection),
    dial: async (address, signal) => {
      const result = await inner.dial(address, signal)
      return result.ok ? { ok: true, connection: counted(result.connection) } : result
    },
  }
}

function headerBytes(payload: number): number {
  if (payload < 126) return 2
  return payload < 65_536 ? 4 : 10
}
