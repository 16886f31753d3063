import type { CollectorClient, CollectorResult } from '@/agent'

/** A collector that can be put out of reach, as by a cut cable between it and this agent. */
export class SilenceableCollector implements CollectorClient {
  isSilent = false
  private readonly inner: CollectorClient

  constructor({ inner }: { inner: CollectorClient }) {
    this.inner = inner
  }

  enrol: CollectorClient['enrol'] = (request, signal) => this.pass(() => this.inner.enrol(request, signal))

  session: CollectorClient['session'] = (request, signal) =>
    this.pass(() => this.inner.session(request, signal))

  report: CollectorClient['report'] = (report, token, signal) =>
    this.pass(() => this.inner.report(report, token, signal))

  private async pass<T>(call: () => Promise<CollectorResult<T>>): Promise<CollectorResult<T>> {
    if (this.isSilent) return { ok: false, error: { code: 'unreachable', reason: 'silenced' } }
    const result = await call()
    // What was on its way when the silence began does not come back either.
    return this.isSilent ? { ok: false, error: { code: 'unreachable', reason: 'silenced' } } : result
  }
}
