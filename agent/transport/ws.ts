import { createServer, type RequestListener, type Server } from 'node:http'
import { createServer as createTlsServer } from 'node:https'
import { WebSocket, WebSocketServer } from 'ws'
import { MAX_FRAME_BYTES } from '@/lib/protocol'
import type { Clock } from '../clock'
import { Inbox } from './inbox'
import type { Connection, DialResult, ListenInit, Listening, Transport } from './transport'

/** A peer that does not answer a closing message within this time is cut off. */
const CLOSE_WAIT_MS = 2_000
const DIAL_WAIT_MS = 10_000
const MAX_SOCKETS = 4_096
/** RFC 6455 §5.5: a closing message has at most 125 bytes, two of them the code. */
const MAX_REASON_BYTES = 123

export interface WsComponents {
  clock: Clock
}

/** PEM texts. TLS keeps onlookers out; who the other end is, passes and handshake say. */
export interface WsTls {
  /** Of a private CA; without it, whom the system trusts. */
  ca?: string
  /** With a certificate and its key, listening is by `wss` alone. */
  cert?: string
  key?: string
}

export interface WsInit {
  tls?: WsTls
}

/** Links over WebSocket. Compression is off: frames are small, and it would cost memory per connection. */
export function createWsTransport({ clock }: WsComponents, { tls }: WsInit = {}): Transport {
  return {
    listen: (init, onConnection) => listen(clock, tls, init, onConnection),
    dial: (address, signal) => dial(clock, tls, address, signal),
  }
}

const refuseRequest: RequestListener = (_, response) => {
  response.writeHead(426, { upgrade: 'websocket', 'content-type': 'text/plain' })
  response.end('This port speaks WebSocket to the agents of an overlay.\n')
}

/** @throws Error where certificate and key do not fit */
function createHttp(tls: WsTls | undefined): Server {
  const limits = { headersTimeout: DIAL_WAIT_MS, requestTimeout: DIAL_WAIT_MS }
  if (tls?.cert === undefined || tls.key === undefined) return createServer(limits, refuseRequest)
  const { cert, key } = tls
  return createTlsServer({ ...limits, handshakeTimeout: DIAL_WAIT_MS, cert, key }, refuseRequest)
}

async function listen(
  clock: Clock,
  tls: WsTls | undefined,
  { host, port }: ListenInit,
  onConnection: (connection: Connection) => void,
): Promise<Listening> {
  const http = createHttp(tls)
  const scheme = tls?.cert === undefined || tls.key === undefined ? 'ws' : 'wss'
  http.maxConnections = MAX_SOCKETS
  const server = new WebSocketServer({ server: http, maxPayload: MAX_FRAME_BYTES, perMessageDeflate: false })
  server.on('connection', (socket, request) => {
    const { remoteAddress, remotePort } = request.socket
    onConnection(connectionOf(clock, socket, hostPort(String(remoteAddress), Number(remotePort))))
  })
  return new Promise((resolve, reject) => {
    // The WebSocket server repeats the HTTP server's errors.
    server.once('error', reject)
    http.listen(port, host, () => {
      server.off('error', reject)
      server.on('error', () => {})
      const bound = http.address()
      const taken = bound !== null && typeof bound === 'object' ? bound.port : port
      resolve({
        address: `${scheme}://${hostPort(host, taken)}`,
        port: taken,
        // Connections already upgraded stay open; the port is free at once.
        close: async () => {
          server.close()
          http.close()
        },
      })
    })
  })
}

const hostPort = (host: string, port: number): string => `${host.includes(':') ? `[${host}]` : host}:${port}`

function dial(
  clock: Clock,
  tls: WsTls | undefined,
  address: string,
  signal: AbortSignal,
): Promise<DialResult> {
  if (signal.aborted) return Promise.resolve({ ok: false, reason: 'aborted' })
  let socket: WebSocket
  try {
    socket = new WebSocket(address, {
      perMessageDeflate: false,
      maxPayload: MAX_FRAME_BYTES,
      handshakeTimeout: DIAL_WAIT_MS,
      ca: tls?.ca,
    })
  } catch (error) {
    return Promise.resolve({ ok: false, reason: String(error) })
  }
  return new Promise((resolve) => {
    const answer = (result: DialResult) => {
      signal.removeEventListener('abort', onAbort)
      socket.off('error', onError)
      resolve(result)
    }
    const onAbort = () => {
      answer({ ok: false, reason: 'aborted' })
      // Ending a socket that is still connecting raises an error of its own.
      socket.on('error', () => {})
      socket.terminate()
    }
    const onError = (error: Error) => {
      socket.on('error', () => {})
      answer({ ok: false, reason: error.message })
    }
    socket.on('error', onError)
    signal.addEventListener('abort', onAbort, { once: true })
    // Made here, inside the event, so that no message can pass before someone listens.
    socket.once('open', () => answer({ ok: true, connection: connectionOf(clock, socket, address) }))
  })
}

function connectionOf(clock: Clock, socket: WebSocket, remote: string): Connection {
  const inbox = new Inbox()
  let cancelCut = () => {}
  socket.on('message', (data) => inbox.message(bytesOf(data)))
  socket.on('error', () => {})
  socket.on('close', (code, reason) => {
    cancelCut()
    inbox.closed({ code, reason: reason.toString('utf8') })
  })
  return {
    remote,
    get bufferedBytes() {
      return socket.bufferedAmount
    },
    attach: (listener) => inbox.attach(listener),
    send(bytes) {
      if (socket.readyState === WebSocket.OPEN) socket.send(bytes)
    },
    close(code, reason) {
      if (socket.readyState !== WebSocket.OPEN) return
      socket.close(code, shortened(reason))
      cancelCut = clock.after(CLOSE_WAIT_MS, () => socket.terminate())
    },
  }
}

function bytesOf(data: Buffer | ArrayBuffer | Buffer[]): Uint8Array {
  if (Array.isArray(data)) return Buffer.concat(data)
  return data instanceof ArrayBuffer ? new Uint8Array(data) : data
}

function shortened(reason: string): string {
  if (Buffer.byteLength(reason) <= MAX_REASON_BYTES) return reason
  const bytes = Buffer.from(reason).subarray(0, MAX_REASON_BYTES)
  // Without the character that the cut may have torn.
  return new TextDecoder().decode(bytes).replace(/\uFFFD+$/, '')
}
