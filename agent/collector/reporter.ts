import {
  type KeyPair,
  type LeaveReply,
  type PassGrant,
  type ReportReply,
  type SessionReply,
  type SessionRequest,
  sessionText,
  signText,
} from '@/lib/protocol'
import type { Clock } from '../clock'
import type { CollectorClient, CollectorError, CollectorResult, DirectoryReply, SentReport } from './client'

/** A session this close to its end is renewed before the next report. */
const RENEW_BEFORE_MS = 30_000

export interface ReporterComponents {
  client: CollectorClient
  clock: Clock
  keys: KeyPair
  randomBytes: (count: number) => Uint8Array
}

export interface ReporterInit {
  agentId: string
  onPass: (grant: PassGrant) => void
  onSession: (reply: SessionReply) => void
  /** What a session says of the agent besides; asked at each. */
  facts?: () => SessionFacts
}

/** Since version 2; what is absent is not said. */
export type SessionFacts = Pick<SessionRequest, 'host' | 'version' | 'address' | 'node'>

/** Brings reports to the collector: opens sessions as needed, corrects the clock, takes over renewed passes. */
export class Reporter {
  private readonly components: ReporterComponents
  private readonly init: ReporterInit
  private keys: KeyPair
  private session: { token: string; endsAtMs: number } | null = null
  /** The collector's time less the monotonic clock, which no correction of the wall clock moves; null at first. */
  private offsetMs: number | null = null

  constructor(components: ReporterComponents, init: ReporterInit) {
    this.components = components
    this.init = init
    this.keys = components.keys
  }

  /** Signs with another key from now on. */
  setKeys(keys: KeyPair): void {
    this.keys = keys
  }

  /** How far the collector's clock is ahead of this program's, milliseconds. */
  get skewMs(): number {
    return this.nowMs() - this.components.clock.epochMs()
  }

  /** The collector's time as well as it is known. */
  nowMs(): number {
    const { clock } = this.components
    return this.offsetMs === null ? clock.epochMs() : clock.monotonicMs() + this.offsetMs
  }

  async deliver(request: SentReport, signal: AbortSignal): Promise<CollectorResult<ReportReply>> {
    const { client } = this.components
    const result = await this.withToken((token) => client.report(request, token, signal), signal)
    if (result.ok && result.value.pass) this.init.onPass(result.value.pass)
    return result
  }

  leave(reason: string, signal: AbortSignal): Promise<CollectorResult<LeaveReply>> {
    return this.withToken((token) => this.components.client.leave({ reason }, token, signal), signal)
  }

  directory(etag: string | null, signal: AbortSignal): Promise<CollectorResult<DirectoryReply>> {
    return this.withToken((token) => this.components.client.directory(etag, token, signal), signal)
  }

  /** Whether the collector knows this agent: opens a session, unless there is one. */
  async check(signal: AbortSignal): Promise<CollectorResult<null>> {
    const token = await this.token(signal)
    return token.ok ? { ok: true, value: null } : token
  }

  /** A token that the collector does not know any more is replaced once. */
  private async withToken<T>(
    call: (token: string) => Promise<CollectorResult<T>>,
    signal: AbortSignal,
  ): Promise<CollectorResult<T>> {
    const token = await this.token(signal)
    if (!token.ok) return token
    const first = await call(token.value)
    if (first.ok || !isUnauthorised(first.error)) return first
    this.session = null
    const fresh = await this.token(signal)
    if (!fresh.ok) return fresh
    const second = await call(fresh.value)
    if (!second.ok && isUnauthorised(second.error)) this.session = null
    return second
  }

  private async token(signal: AbortSignal): Promise<CollectorResult<string>> {
    if (this.session && this.components.clock.monotonicMs() < this.session.endsAtMs) {
      return { ok: true, value: this.session.token }
    }
    let result = await this.openSession(signal)
    if (!result.ok && result.error.code === 'refused' && result.error.problem.serverTime !== undefined) {
      this.offsetMs = Date.parse(result.error.problem.serverTime) - this.components.clock.monotonicMs()
      result = await this.openSession(signal)
    }
    return result.ok ? { ok: true, value: result.value.token } : result
  }

  private async openSession(signal: AbortSignal): Promise<CollectorResult<SessionReply>> {
    const { client, clock, randomBytes } = this.components
    const { agentId } = this.init
    const at = new Date(this.nowMs()).toISOString()
    const nonce = Buffer.from(randomBytes(16)).toString('base64url')
    const signature = signText(this.keys.privateKey, sessionText({ agentId, at, nonce }))
    const askedAtMs = clock.monotonicMs()
    const result = await client.session({ ...this.init.facts?.(), agentId, at, nonce, signature }, signal)
    if (!result.ok) return result
    const { token, expiresAt, serverTime, pass, passExpiresAt } = result.value
    const nowMs = clock.monotonicMs()
    // The collector said its time about half way through the exchange.
    this.offsetMs = Date.parse(serverTime) - (askedAtMs + nowMs) / 2
    const lastsMs = Date.parse(expiresAt) - Date.parse(serverTime)
    this.session = { token, endsAtMs: nowMs + Math.max(lastsMs / 2, lastsMs - RENEW_BEFORE_MS) }
    this.init.onPass({ pass, passExpiresAt })
    this.init.onSession(result.value)
    return result
  }
}

function isUnauthorised(error: CollectorError): boolean {
  return error.code === 'refused' && error.problem.status === 401
}
