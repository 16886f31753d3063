import { randomBytes } from 'node:crypto'
import { createServer } from 'node:http'
import type { AddressInfo } from 'node:net'
import type { Clock, CollectorClient, CollectorResult } from '@/agent'
import {
  type ControlState,
  DEFAULT_SETTINGS,
  type Estimate,
  evaluate,
  initialControl,
  type JoinedAgent,
  type Snapshot,
} from '@/lib/method/control'
import type { Orders } from '@/lib/method/orders'
import { PACES, type PaceName } from '@/lib/method/pace'
import type { Random } from '@/lib/method/random'
import {
  type AgentProblem,
  type EnrolReply,
  enrolRequestSchema,
  enrolText,
  generateKeys,
  type ReportReply,
  reportSchema,
  SESSION_SKEW_SECONDS,
  type SessionReply,
  sessionRequestSchema,
  sessionText,
  signPass,
  verifyText,
} from '@/lib/protocol'

export interface TestCollectorInit {
  pace?: PaceName
  weights?: 'unit' | 'delivered'
  code?: string
  tokenLastsMs?: number
}

interface Joined {
  agentId: string
  name: string
  key: string
  joinedAtMs: number
  last: JoinedAgent['last']
}

/**
 * A collector without a database: real schemas, signatures, passes and the real control loop, so that agents can
 * be tested against what they will meet.
 */
export class TestCollector implements CollectorClient {
  readonly overlayId = 'overlay-harbourline'
  readonly keys = generateKeys()
  readonly agents = new Map<string, Joined>()
  readonly code: string
  readonly pace: PaceName
  sessionsOpened = 0
  estimate: Estimate | null = null
  onEstimate: (estimate: Estimate) => void = () => {}
  /** Orders instead of the control loop's; issued anew every interval, as its are. */
  fixedOrders: ((sequence: number) => Orders) | null = null
  private readonly tokens = new Map<string, { agentId: string; endsAtMs: number }>()
  private readonly clock: Clock
  private readonly random: Random
  private readonly init: TestCollectorInit
  private control: ControlState
  private before: Snapshot | null = null
  private orders: { orders: Orders; issuedAtMs: number } | null = null
  private cancel = () => {}

  constructor({ clock, random }: { clock: Clock; random: Random }, init: TestCollectorInit = {}) {
    this.clock = clock
    this.random = random
    this.init = init
    this.code = init.code ?? 'code-for-tests'
    this.pace = init.pace ?? 'drill'
    this.control = initialControl(clock.monotonicMs(), PACES[this.pace])
  }

  start(): void {
    this.cancel = this.clock.after(PACES[this.pace].intervalMs, () => {
      this.evaluate()
      this.start()
    })
  }

  stop(): void {
    this.cancel()
  }

  revokeSessions(): void {
    this.tokens.clear()
  }

  enrol: CollectorClient['enrol'] = async (body) => {
    const request = enrolRequestSchema.parse(JSON.parse(JSON.stringify(body)))
    if (request.code !== this.code)
      return refused(403, 'code-unknown', 'The joining code is not known.', false)
    if (!verifyText(request.publicKey, enrolText(request), request.signature)) {
      return refused(401, 'signature-wrong', 'The signature is wrong.', false)
    }
    const agentId = `agent-${request.name}`
    const joined = {
      agentId,
      name: request.name,
      key: request.publicKey,
      joinedAtMs: this.clock.monotonicMs(),
      last: null,
    }
    this.agents.set(agentId, joined)
    const reply: EnrolReply = {
      agentId,
      overlay: { id: this.overlayId, slug: 'harbourline', name: 'Harbourline' },
      pace: this.pace,
      weights: this.init.weights ?? 'delivered',
      disclosure: 'named',
      overlayKey: this.keys.publicKey,
      ...(await this.passFor(joined)),
    }
    return { ok: true, value: reply }
  }

  session: CollectorClient['session'] = async (body) => {
    const request = sessionRequestSchema.parse(JSON.parse(JSON.stringify(body)))
    const joined = this.agents.get(request.agentId)
    if (!joined || !verifyText(joined.key, sessionText(request), request.signature)) {
      return refused(401, 'agent-unknown', 'No such agent, or not its key.', false)
    }
    const nowMs = this.clock.epochMs()
    const serverTime = new Date(nowMs).toISOString()
    if (Math.abs(Date.parse(request.at) - nowMs) > SESSION_SKEW_SECONDS * 1000) {
      return refused(401, 'clock-skew', 'The clock is off.', true, serverTime)
    }
    this.sessionsOpened += 1
    const lastsMs = this.init.tokenLastsMs ?? 3_600_000
    const token = randomBytes(16).toString('base64url')
    this.tokens.set(token, { agentId: joined.agentId, endsAtMs: nowMs + lastsMs })
    const reply: SessionReply = {
      token,
      expiresAt: new Date(nowMs + lastsMs).toISOString(),
      serverTime,
      disclosure: 'named',
      pace: this.pace,
      ...(await this.passFor(joined)),
    }
    return { ok: true, value: reply }
  }

  report: CollectorClient['report'] = async (body, token) => {
    const session = this.tokens.get(token)
    const joined = session && this.agents.get(session.agentId)
    if (!session || !joined || session.endsAtMs < this.clock.epochMs()) {
      return refused(401, 'session-ended', 'The session has ended.', true)
    }
    const report = reportSchema.parse(JSON.parse(JSON.stringify(body)))
    joined.last = { report, receivedAtMs: this.clock.monotonicMs() }
    const { orders, issuedAtMs } = this.orders ?? { orders: null, issuedAtMs: this.clock.monotonicMs() }
    const reply: ReportReply = { orders, ordersAgeMs: this.clock.monotonicMs() - issuedAtMs }
    return { ok: true, value: reply }
  }

  private evaluate(): void {
    if (this.fixedOrders) {
      this.control = { ...this.control, sequence: this.control.sequence + 1 }
      this.orders = { orders: this.fixedOrders(this.control.sequence), issuedAtMs: this.clock.monotonicMs() }
      return
    }
    const now: Snapshot = {
      atMs: this.clock.monotonicMs(),
      agents: [...this.agents.values()].map(({ agentId, joinedAtMs, last }) => ({
        agentId,
        joinedAtMs,
        last,
      })),
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
    this.orders = { orders, issuedAtMs: now.atMs }
    this.estimate = estimate
    this.onEstimate(estimate)
  }

  private async passFor({ agentId, name, key }: Joined): Promise<{ pass: string; passExpiresAt: string }> {
    const issuedAt = Math.floor(this.clock.epochMs() / 1000)
    const expiresAt = issuedAt + 86_400
    const claims = { overlayId: this.overlayId, agentId, name, key, issuedAt, expiresAt }
    return {
      pass: await signPass(this.keys.privateKey, claims),
      passExpiresAt: new Date(expiresAt * 1000).toISOString(),
    }
  }
}

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

/** The same over HTTP on loopback. */
export async function serve(collector: TestCollector): Promise<{ url: string; close: () => Promise<void> }> {
  const signal = new AbortController().signal
  const server = createServer(async (request, response) => {
    const chunks: Buffer[] = []
    for await (const chunk of request) chunks.push(chunk)
    const body = JSON.parse(Buffer.concat(chunks).toString('utf8'))
    const token = request.headers.authorization?.slice('Bearer '.length) ?? ''
    const result = await (request.url === '/api/agent/enrol'
      ? collector.enrol(body, signal)
      : request.url === '/api/agent/session'
        ? collector.session(body, signal)
        : collector.report(body, token, signal))
    const problem: AgentProblem | null =
      !result.ok && result.error.code === 'refused' ? result.error.problem : null
    response.writeHead(problem?.status ?? 200, { 'content-type': 'application/json' })
    response.end(JSON.stringify(result.ok ? result.value : problem))
  })
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve))
  const { port } = server.address() as AddressInfo
  return {
    url: `http://127.0.0.1:${port}`,
    close: async () => {
      server.closeAllConnections()
      await new Promise((resolve) => server.close(resolve))
    },
  }
}
