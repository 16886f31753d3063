import { createServer, connect as dialSocket, type Socket } from 'node:net'
import { type Connection, type DialResult, Inbox, LOST_CODE, type Transport } from '@/agent'
import { MAX_FRAME_BYTES } from '@/lib/protocol'

const HEADER_BYTES = 5
const MESSAGE = 0
const CLOSE = 1
/** What the other end has sent meanwhile must be read before, or the system throws away what was said last. */
const CLOSE_WAIT_MS = 30_000

/**
 * A transport as an embedding program might write it over its own connections: plain TCP, each message preceded by its
 * length (4 bytes) and what it is (1 byte).
 */
export function createSocketTransport(): Transport {
  return {
    listen: ({ host, port }, onConnection) =>
      new Promise((resolve, reject) => {
        const server = createServer((socket) => onConnection(connectionOf(socket)))
        server.once('error', reject)
        server.listen(port, host, () => {
          const bound = server.address()
          const taken = bound !== null && typeof bound === 'object' ? bound.port : port
          const close = async () => {
            server.close()
          }
          resolve({ address: `tcp://${host}:${taken}`, port: taken, close })
        })
      }),
    dial,
  }
}

function dial(address: string, signal: AbortSignal): Promise<DialResult> {
  if (signal.aborted) return Promise.resolve({ ok: false, reason: 'aborted' })
  const place = URL.canParse(address) ? new URL(address) : null
  if (place?.protocol !== 'tcp:')
    return Promise.resolve({ ok: false, reason: `not tcp://host:port: ${address}` })
  return new Promise((resolve) => {
    const socket = dialSocket({ host: place.hostname, port: Number(place.port), signal })
    const onError = (error: Error) => resolve({ ok: false, reason: error.message })
    socket.once('error', onError)
    socket.once('connect', () => {
      socket.off('error', onError)
      resolve({ ok: true, connection: connectionOf(socket) })
    })
  })
}

function connectionOf(socket: Socket): Connection {
  const inbox = new Inbox()
  let said: { code: number; reason: string } | null = null
  let waiting = Buffer.alloc(0)
  const write = (kind: number, body: Uint8Array) => {
    const header = Buffer.alloc(HEADER_BYTES)
    header.writeUInt32BE(body.length)
    header[4] = kind
    if (socket.writable) socket.write(Buffer.concat([header, body]))
  }
  const close = (code: number, reason: string) => {
    if (said) return
    said = { code, reason }
    write(CLOSE, Buffer.concat([Buffer.from([code >> 8, code & 0xff]), Buffer.from(reason)]))
    socket.end()
    setTimeout(() => socket.destroy(), CLOSE_WAIT_MS).unref()
  }
  socket.on('data', (bytes) => {
    if (said) return
    waiting = Buffer.concat([waiting, bytes])
    while (waiting.length >= HEADER_BYTES) {
      const length = waiting.readUInt32BE()
      if (length > MAX_FRAME_BYTES) {
        close(1009, 'too large')
        return
      }
      if (waiting.length < HEADER_BYTES + length) return
      const body = waiting.subarray(HEADER_BYTES, HEADER_BYTES + length)
      const kind = waiting[4]
      waiting = waiting.subarray(HEADER_BYTES + length)
      if (kind === MESSAGE) inbox.message(body)
      else {
        said = { code: body.readUInt16BE(), reason: body.subarray(2).toString('utf8') }
        socket.end()
        return
      }
    }
  })
  socket.on('error', () => {})
  socket.on('close', () => inbox.closed(said ?? { code: LOST_CODE, reason: '' }))
  return {
    remote: `${socket.remoteAddress}:${socket.remotePort}`,
    get bufferedBytes() {
      return socket.writableLength
    },
    attach: (listener) => inbox.attach(listener),
    send(bytes) {
      if (!said) write(MESSAGE, bytes)
    },
    close,
  }
}
