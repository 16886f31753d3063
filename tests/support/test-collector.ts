import { randomBytes } from 'node:crypto'
import type { Clock, CollectorClient, CollectorResult } from '@/agent'
import type { CollectorError } from '@/agent/collector/client'
import { COLLECTOR_TIMEOUT_MS } from '@/agent/collector/http-client'
import {
  type ControlState,
  DEFAULT_SETTINGS,
  type Estimate,
  evaluate,
  initialControl,
  type JoinedAgent,
  type Snapshot,
} from '@/lib/method/control'
import type { OrdersProof } from '@/lib/method/frame'
import type { Orders } from '@/lib/method/orders'
import { PACES, type PaceName } from '@/lib/method/pace'
import type { Random } from '@/lib/method/random'
import type { Report } from '@/lib/method/report'
import {
  type AwaySummary,
  type EnrolReply,
  enrolRequestSchema,
  enrolText,
  keyChangeRequestSchema,
  keyChangeText,
  leaveRequestSchema,
  type PassGrant,
  RELAYED_MOST_SECONDS,
  type RelayedReply,
  type ReportReply,
  reportRequestSchema,
  reportSchema,
  SESSION_SKEW_SECONDS,
  type SessionReply,
  type SessionRequest,
  type SignedReport,
  sessionRequestSchema,
  sessionText,
  type UpgradeOffer,
  verifyReport,
  verifyText,
} from '@/lib/protocol'
import { TestAuthority } from './test-authority'

export { serve } from './test-collector-server'

export interface TestCollectorInit {
  pace?: PaceName
  weights?: 'unit' | 'delivered'
  code?: string
  tokenLastsMs?: number
  passLastsMs?: number
}

interface Joined {
  agentId: string
  name: string
  key: string
  joinedAtMs: number
  last: JoinedAgent['last']
  state: 'joined' | 'left' | 'revoked'
  passExpiresAtMs: number
  /** Its last report came through neighbours. */
  relayed: boolean
  session: SessionRequest | null
}

/**
 * A collector without a database: real schemas, signatures, passes and the real control loop, so that agents can
 * be tested against what they will meet.
 */
export class TestCollector implements CollectorClient {
  readonly overlayId = 'overlay-harbourline'
  readonly authority = new TestAuthority({ overlayId: this.overlayId })
  readonly agents = new Map<string, Joined>()
  readonly code: string
  readonly pace: PaceName
  sessionsOpened = 0
  estimate: Estimate | null = null
  onEstimate: (estimate: Estimate) => void = () => {}
  /** Out of reach, and without a thought of its own: a server that stands still. */
  isAway = false
  /** Out of reach, but at work: a server cut off. */
  isUnreachable = false
  /** Agents whose way swallows what they send: no answer comes, until they give up. */
  swallows: ReadonlySet<string> = new Set()
  upgrade: UpgradeOffer | null = null
  readonly away: { agentId: string; spans: AwaySummary[] }[] = []
  /** Answers that are lost on their way back, by route. */
  loses: (route: 'key' | 'report') => boolean = () => false
  /** Orders instead of the control loop's; issued anew every interval, as its are. */
  fixedOrders: ((sequence: number) => Orders) | null = null
  private readonly tokens = new Map<string, { agentId: string; endsAtMs: number }>()
  private readonly clock: Clock
  private readonly random: Random
  private readonly init: TestCollectorInit
  private control: ControlState
  private before: Snapshot | null = null
  private orders: { orders: Orders; issuedAtMs: number } | null = null
  private proof: OrdersProof | null = null
  private cancel = () => {}

  constructor({ clock, random }: { clock: Clock; random: Random }, init: TestCollectorInit = {}) {
    this.clock = clock
    this.random = random
    this.init = init
    this.code = init.code ?? 'code-for-tests'
    this.pace = init.pace ?? 'drill'
    this.control = initialControl(clock.monotonicMs(), PACES[this.pace])
  }

  get lastOrders(): Orders | null {
    return this.orders?.orders ?? null
  }

  start(): void {
    this.cancel = this.clock.after(this.control.intervalMs ?? PACES[this.pace].intervalMs, () => {
      if (!this.isAway) this.evaluate()
      this.start()
    })
  }

  stop(): void {
    this.cancel()
  }

  revokeSessions(): void {
    this.tokens.clear()
  }

  enrol: CollectorClient['enrol'] = (body) =>
    this.reach(async () => {
      const request = enrolRequestSchema.parse(JSON.parse(JSON.stringify(body)))
      if (request.code !== this.code)
        return refused(403, 'code-unknown', 'The joining code is not known.', false)
      if (!verifyText(request.publicKey, enrolText(request), request.signature)) {
        return refused(401, 'signature-wrong', 'The signature is wrong.', false)
      }
      const agentId = `agent-${request.name}`
      const joined: Joined = {
        agentId,
        name: request.name,
        key: request.publicKey,
        joinedAtMs: this.clock.monotonicMs(),
        last: null,
        state: 'joined',
        passExpiresAtMs: 0,
        relayed: false,
        session: null,
      }
      this.agents.set(agentId, joined)
      const value: EnrolReply = {
        agentId,
        overlay: { id: this.overlayId, slug: 'harbourline', name: 'Harbourline' },
        pace: this.pace,
        weights: this.init.weights ?? 'delivered',
        disclosure: 'named',
        overlayKey: this.authority.keys.publicKey,
        ...(await this.passFor(joined)),
      }
      return { ok: true, value }
    })

  session: CollectorClient['session'] = (body) =>
    this.reach(async () => {
      const request = sessionRequestSchema.parse(JSON.parse(JSON.stringify(body)))
      const joined = this.agents.get(request.agentId)
      if (!joined || !verifyText(joined.key, sessionText(request), request.signature)) {
        return refused(401, 'agent-unknown', 'No such agent, or not its key.', false)
      }
      if (joined.state !== 'joined') return ended()
      const nowMs = this.clock.epochMs()
      const serverTime = new Date(nowMs).toISOString()
      if (Math.abs(Date.parse(request.at) - nowMs) > SESSION_SKEW_SECONDS * 1000) {
        return refused(401, 'clock-skew', 'The clock is off.', true, serverTime)
      }
      this.sessionsOpened += 1
      joined.session = request
      const lastsMs = this.init.tokenLastsMs ?? 3_600_000
      const token = randomBytes(16).toString('base64url')
      this.tokens.set(token, { agentId: joined.agentId, endsAtMs: nowMs + lastsMs })
      const value: SessionReply = {
        token,
        expiresAt: new Date(nowMs + lastsMs).toISOString(),
        serverTime,
        disclosure: 'named',
        pace: this.pace,
        keyRings: this.authority.rings,
        ...(await this.passFor(joined)),
      }
      return { ok: true, value }
    })

  report: CollectorClient['report'] = (body, token, signal) =>
    this.reach(async () => {
      const joined = this.holderOf(token)
      if (!joined.ok) return joined
      if (this.swallows.has(joined.value.agentId)) return this.swallow(signal)
      const request = reportRequestSchema.parse(JSON.parse(JSON.stringify(body)))
      const report = reportSchema.parse(request)
      this.store(joined.value, report, false)
      const { agentId } = joined.value
      if (request.away) this.away.push({ agentId, spans: request.away })
      const relayed = await Promise.all((request.relayed ?? []).map((one) => this.takeRelayed(one)))
      const { orders, issuedAtMs } = this.orders ?? { orders: null, issuedAtMs: this.clock.monotonicMs() }
      const isSigned = request.protocol >= 2
      const ring = report.node.health?.keyRing ?? 1
      const pass = await this.renewalFor(joined.value)
      const value: ReportReply = {
        orders: isSigned ? null : orders,
        ordersAgeMs: this.clock.monotonicMs() - issuedAtMs,
        ...(pass ? { pass } : {}),
        ...(isSigned ? { signedOrders: this.proof, upgrade: this.upgrade } : {}),
        ...(isSigned ? { keyRings: this.authority.rings.filter(({ version }) => version > ring) } : {}),
        ...(request.wantsReceipt ? { receipt: this.authority.receipt(agentId, report) } : {}),
        ...(relayed.length > 0 ? { relayed } : {}),
      }
      return this.loses('report') ? lost() : { ok: true, value }
    })

  key: CollectorClient['key'] = (body) =>
    this.reach(async () => {
      const request = keyChangeRequestSchema.parse(JSON.parse(JSON.stringify(body)))
      const joined = this.agents.get(request.agentId)
      const text = keyChangeText(request)
      const isNew = joined !== undefined && joined.key !== request.publicKey
      const isProven =
        joined !== undefined &&
        verifyText(request.publicKey, text, request.newSignature) &&
        (!isNew || verifyText(joined.key, text, request.signature))
      if (!isProven) return refused(401, 'bad-signature', 'A signature is wrong.', false)
      joined.key = request.publicKey
      const value = await this.passFor(joined)
      return this.loses('key') ? lost() : { ok: true, value }
    })

  leave: CollectorClient['leave'] = (body, token) =>
    this.reach(async () => {
      leaveRequestSchema.parse(JSON.parse(JSON.stringify(body)))
      const joined = this.holderOf(token)
      if (!joined.ok) return joined
      joined.value.state = 'left'
      return { ok: true, value: { leftAt: new Date(this.clock.epochMs()).toISOString() } }
    })

  directory: CollectorClient['directory'] = (etag, token) =>
    this.reach(async () => {
      const joined = this.holderOf(token)
      if (!joined.ok) return joined
      const items = [...this.agents.values()].map(({ agentId, name, session }) => ({
        agentId,
        name,
        address: session?.address ?? null,
        node: session?.node ?? null,
      }))
      const now = `"${items.length}"`
      return { ok: true, value: { etag: now, directory: etag === now ? null : { items } } }
    })

  private async reach<T>(call: () => Promise<CollectorResult<T>>): Promise<CollectorResult<T>> {
    return this.isAway || this.isUnreachable ? lost() : call()
  }

  private swallow(signal: AbortSignal): Promise<CollectorResult<ReportReply>> {
    const timeoutMs = COLLECTOR_TIMEOUT_MS
    return new Promise((resolve) => {
      const end = (error: CollectorError) => {
        cancel()
        resolve({ ok: false, error })
      }
      const cancel = this.clock.after(timeoutMs, () => end({ code: 'timeout', timeoutMs }))
      const stopped = () => end({ code: 'unreachable', reason: 'stopped' })
      signal.addEventListener('abort', stopped, { once: true })
    })
  }

  private holderOf(token: string): CollectorResult<Joined> {
    const session = this.tokens.get(token)
    const joined = session && this.agents.get(session.agentId)
    if (!session || !joined || session.endsAtMs < this.clock.epochMs()) {
      return refused(401, 'session-ended', 'The session has ended.', true)
    }
    return joined.state === 'joined' ? { ok: true, value: joined } : ended()
  }

  /** Newer than what is held, or of another start. */
  private store(joined: Joined, report: Report, relayed: boolean): void {
    const held = joined.last?.report
    if (held && held.incarnation === report.incarnation && held.number >= report.number) return
    joined.last = { report, receivedAtMs: this.clock.monotonicMs() }
    joined.relayed = relayed
  }

  private async takeRelayed(signed: SignedReport): Promise<RelayedReply> {
    const { agentId } = signed
    const joined = this.agents.get(agentId)
    const no = (problem: string): RelayedReply => ({
      agentId,
      number: null,
      stored: false,
      problem,
      pass: null,
    })
    if (!joined || !verifyReport(signed, joined.key)) return no('bad-signature')
    if (joined.state !== 'joined') return no('agent-ended')
    const ageMs = this.clock.epochMs() - Date.parse(signed.at)
    if (Math.abs(ageMs) > RELAYED_MOST_SECONDS * 1000) return no('too-old')
    const report = reportSchema.parse(JSON.parse(signed.body))
    this.store(joined, report, true)
    const pass = await this.renewalFor(joined)
    const ring = report.node.health?.keyRing ?? 1
    const keyRings = this.authority.rings.filter(({ version }) => version > ring)
    return { agentId, number: report.number, stored: true, problem: null, pass, keyRings }
  }

  private evaluate(): void {
    if (this.fixedOrders) {
      this.control = { ...this.control, sequence: this.control.sequence + 1 }
      this.issue(this.fixedOrders(this.control.sequence), this.clock.monotonicMs())
      return
    }
    const now: Snapshot = {
      atMs: this.clock.monotonicMs(),
      agents: [...this.agents.values()]
        .filter(({ state }) => state === 'joined')
        .map(({ agentId, joinedAtMs, last }) => ({ agentId, joinedAtMs, last })),
    }
    const { control, orders, estimate } = evaluate({
      control: this.control,
      before: this.before,
      now,
      settings: { ...DEFAULT_SETTINGS, pace: PACES[this.pace], disclosure: 'named' },
      sequence: this.control.sequence + 1,
      random: this.random,
    })
    this.before = now
    this.control = control
    this.issue(orders, now.atMs)
    this.estimate = estimate
    this.onEstimate(estimate)
  }

  private issue(orders: Orders, issuedAtMs: number): void {
    const shut = [...this.agents.values()].flatMap(({ agentId, state }) =>
      state === 'joined' ? [] : [{ agentId, reason: state }],
    )
    this.orders = { orders: shut.length > 0 ? { ...orders, shut } : orders, issuedAtMs }
    this.proof = this.authority.orders(JSON.stringify(this.orders.orders))
  }

  private get passLastsMs(): number {
    return this.init.passLastsMs ?? 86_400_000
  }

  private async passFor(joined: Joined): Promise<PassGrant> {
    const grant = await this.authority.pass(joined, this.clock.epochMs(), this.passLastsMs)
    joined.passExpiresAtMs = Date.parse(grant.passExpiresAt)
    return grant
  }

  /** Where less than half is left. */
  private async renewalFor(joined: Joined): Promise<PassGrant | null> {
    const leftMs = joined.passExpiresAtMs - this.clock.epochMs()
    return leftMs < this.passLastsMs / 2 ? this.passFor(joined) : null
  }
}

const lost = <T>(): CollectorResult<T> => ({ ok: false, error: { code: 'unreachable', reason: 'away' } })
const ended = <T>(): CollectorResult<T> =>
  refused(403, 'agent-ended', 'This agent left the overlay or was revoked.', false)

function refused<T>(
  status: number,
  code: string,
  detail: string,
  retry: boolean,
  serverTime?: string,
): CollectorResult<T> {
  return {
    ok: false,
    error: { code: 'refused', problem: { status, title: code, detail, code, retry, serverTime } },
  }
}
