import type { Report } from '@/lib/method/report'
import {
  type KeyPair,
  type PassGrant,
  type ReportReply,
  type SessionReply,
  sessionText,
  signText,
} from '@/lib/protocol'
import type { Clock } from '../clock'
import type { CollectorClient, CollectorError, CollectorResult } from './client'

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
}

/** Brings reports to the collector: opens sessions as needed, corrects the clock, takes over renewed passes. */
export class Reporter {
  private readonly components: ReporterComponents
  private readonly init: ReporterInit
  private session: { token: string; endsAtMs: number } | null = null
  /** The collector's time less the monotonic clock, which no correction of the wall clock moves; null at first. */
  private offsetMs: number | null = null

  constructor(components: ReporterComponents, init: ReporterInit) {
    this.components = components
    this.init = init
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

  async deliver(report: Report, signal: AbortSignal): Promise<CollectorResult<ReportReply>> {
    const token = await this.token(signal)
    if (!token.ok) return token
    const first = await this.components.client.report(report, token.value, signal)
    if (first.ok || !isUnauthorised(first.error)) return this.noted(first)
    this.session = null
    const fresh = await this.token(signal)
    if (!fresh.ok) return fresh
    return this.noted(await this.components.client.report(report, fresh.value, signal))
  }

  /** Whether the collector knows this agent: opens a session, unless there is one. */
  async check(signal: AbortSignal): Promise<CollectorResult<null>> {
    const token = await this.token(signal)
    return token.ok ? { ok: true, value: null } : token
  }

  private noted(result: CollectorResult<ReportReply>): CollectorResult<ReportReply> {
    if (result.ok && result.value.pass) this.init.onPass(result.value.pass)
    if (!result.ok && isUnauthorised(result.error)) this.session = null
    return result
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
    const { client, clock, keys, randomBytes } = this.components
    const { agentId } = this.init
    const at = new Date(this.nowMs()).toISOString()
    const nonce = Buffer.from(randomBytes(16)).toString('base64url')
    const signature = signText(keys.privateKey, sessionText({ agentId, at, nonce }))
    const askedAtMs = clock.monotonicMs()
    const result = await client.session({ agentId, at, nonce, signature }, signal)
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
