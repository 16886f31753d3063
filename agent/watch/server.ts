import { createServer, type IncomingMessage, type Server, type ServerResponse } from 'node:http'
import { isIP } from 'node:net'
import type { ListenInit } from '../transport/transport'
import { judge, type WatchFacts } from './facts'
import { METRICS_MEDIA_TYPE, metricsText } from './metrics-text'

export interface WatchServerComponents {
  facts: () => WatchFacts
  tickAgeMs: () => number
}

export interface WatchServerInit extends ListenInit {
  /** Takes an address that other machines reach; /status names neighbours. */
  anywhere: boolean
}

interface Reply {
  status: number
  type: string
  text: string
}

/** Whether only programs of this machine reach an address. */
export const isLoopback = (host: string): boolean =>
  host === 'localhost' || host === '::1' || (isIP(host) === 4 && host.startsWith('127.'))

/** Metrics, health and status of the agent for programs of its machine. */
export class WatchServer {
  private readonly components: WatchServerComponents
  private readonly init: WatchServerInit
  private server: Server | null = null

  constructor(components: WatchServerComponents, init: WatchServerInit) {
    this.components = components
    this.init = init
  }

  /** @returns the port taken. @throws Error where it cannot be, or where other machines would reach it */
  start(): Promise<number> {
    const { host, port, anywhere } = this.init
    if (!anywhere && !isLoopback(host))
      return Promise.reject(
        new Error(`${host} is reached from other machines: give 127.0.0.1, or say --metrics-anywhere.`),
      )
    const server = createServer({ requestTimeout: 5_000, headersTimeout: 5_000 }, (request, response) =>
      this.answer(request, response),
    )
    server.maxConnections = 32
    this.server = server
    return new Promise((resolve, reject) => {
      server.once('error', reject)
      server.listen(port, host, () => {
        server.off('error', reject)
        server.on('error', () => {})
        const bound = server.address()
        resolve(bound !== null && typeof bound === 'object' ? bound.port : port)
      })
    })
  }

  stop(): Promise<void> {
    const { server } = this
    this.server = null
    if (!server?.listening) return Promise.resolve()
    server.closeAllConnections()
    return new Promise((resolve) => server.close(() => resolve()))
  }

  private answer(request: IncomingMessage, response: ServerResponse): void {
    // A page that a browser on this machine shows must not read it by a name that leads here.
    const reply = isHostGood(request, this.init) ? this.replyTo(request) : text(403, 'Ask by address.\n')
    const headers = {
      'content-type': reply.type,
      'cache-control': 'no-store',
      'x-content-type-options': 'nosniff',
    }
    response.writeHead(reply.status, headers)
    response.end(request.method === 'HEAD' ? undefined : reply.text)
  }

  private replyTo({ method, url = '/' }: IncomingMessage): Reply {
    if (method !== 'GET' && method !== 'HEAD') return text(405, 'Only GET.\n')
    const facts = this.components.facts()
    const verdict = judge(facts, { tickAgeMs: this.components.tickAgeMs() })
    switch (url.split('?')[0]) {
      case '/metrics':
        return { status: 200, type: METRICS_MEDIA_TYPE, text: metricsText(facts, verdict.ok) }
      case '/health':
        return json(verdict.ok ? 200 : 503, verdict)
      case '/status': {
        const { status, version, uptimeSeconds, withoutAgent } = facts
        const source = status.source && { ...status.source, withoutAgent }
        return json(200, { ...status, version, uptimeSeconds, source })
      }
      default:
        return text(404, 'There is /metrics, /health and /status.\n')
    }
  }
}

function isHostGood({ headers }: IncomingMessage, { anywhere }: WatchServerInit): boolean {
  if (anywhere) return true
  const host = headers.host?.replace(/:\d+$/, '').replace(/^\[|\]$/g, '')
  return host === undefined || isLoopback(host)
}

const text = (status: number, body: string): Reply => ({
  status,
  type: 'text/plain; charset=utf-8',
  text: body,
})
const json = (status: number, body: object): Reply => ({
  status,
  type: 'application/json',
  text: `${JSON.stringify(body)}\n`,
})
