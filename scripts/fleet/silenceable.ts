import type { CollectorClient, CollectorResult, Connection, Transport } from '@/agent'
import { MESSAGE_KIND } from '@/lib/protocol'

/** What of the way between one agent and its collector is cut. */
export interface Silence {
  /** The agent does not reach the collector itself. */
  direct: boolean
  /** Nor do its neighbours carry anything for it, or it for them. */
  relayed: boolean
}

/** A collector that can be put out of reach, as by a cut cable between it and this agent. */
export class SilenceableCollector implements CollectorClient {
  private readonly inner: CollectorClient
  private readonly silence: Silence

  constructor({ inner }: { inner: CollectorClient }, silence: Silence) {
    this.inner = inner
    this.silence = silence
  }

  enrol: CollectorClient['enrol'] = (request, signal) => this.pass(() => this.inner.enrol(request, signal))

  session: CollectorClient['session'] = (request, signal) =>
    this.pass(() => this.inner.session(request, signal))

  report: CollectorClient['report'] = (request, token, signal) =>
    this.pass(() => this.inner.report(request, token, signal))

  key: CollectorClient['key'] = (request, signal) => this.pass(() => this.inner.key(request, signal))

  leave: CollectorClient['leave'] = (request, token, signal) =>
    this.pass(() => this.inner.leave(request, token, signal))

  directory: CollectorClient['directory'] = (etag, token, signal) =>
    this.pass(() => this.inner.directory(etag, token, signal))

  private async pass<T>(call: () => Promise<CollectorResult<T>>): Promise<CollectorResult<T>> {
    if (this.silence.direct) return silenced()
    const result = await call()
    // What was on its way when the silence began does not come back either.
    return this.silence.direct ? silenced() : result
  }
}

const silenced = <T>(): CollectorResult<T> => ({
  ok: false,
  error: { code: 'unreachable', reason: 'silenced' },
})

/** Links that carry walkers as ever, and reports only while there is no silence. */
export function silenceable(inner: Transport, silence: Silence): Transport {
  const isHeard = (bytes: Uint8Array) => !silence.relayed || !isRelay(bytes)
  const wrap = (connection: Connection): Connection => ({
    remote: connection.remote,
    get bufferedBytes() {
      return connection.bufferedBytes
    },
    attach: (listener) =>
      connection.attach({
        message: (bytes) => {
          if (isHeard(bytes)) listener.message(bytes)
        },
        closed: (event) => listener.closed(event),
      }),
    send: (bytes) => {
      if (isHeard(bytes)) connection.send(bytes)
    },
    close: (code, reason) => connection.close(code, reason),
  })
  return {
    listen: (init, onConnection) => inner.listen(init, (connection) => onConnection(wrap(connection))),
    dial: async (address, signal) => {
      const result = await inner.dial(address, signal)
      return result.ok ? { ok: true, connection: wrap(result.connection) } : result
    },
  }
}

const isRelay = ([kind]: Uint8Array): boolean =>
  kind === MESSAGE_KIND.relay || kind === MESSAGE_KIND.relayReply
