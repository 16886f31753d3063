import { randomBytes } from 'node:crypto'
import { createServer, type IncomingMessage, type Server } from 'node:http'
import type { AddressInfo } from 'node:net'
import { gunzipSync } from 'node:zlib'
import {
  type ControlSettings,
  type ControlState,
  type Estimate,
  evaluateOverlay,
  initialControl,
  type JoinedAgent,
  type Snapshot,
} from '@/lib/method/control'
import { PACES, type PaceName } from '@/lib/method/pace'
import type { Random } from '@/lib/method/random'
import {
  type EnrolReply,
  enrolRequestSchema,
  generateKeys,
  type ReportReply,
  reportRequestSchema,
  type SessionReply,
  sessionRequestSchema,
  signOrders,
  signPass,
  signReceipt,
  statementOf,
} from '@/lib/protocol'
import { BATCH_PATH, type BatchReply, reportBatchSchema } from './report-batch'

const PASS_SECONDS = 3_600

interface Joined {
  name: string
  key: string
  joinedAtMs: number
  last: JoinedAgent['last']
  /** Of each report: its JSON, and as it came. */
  reportBytes: { plain: number; wire: number }[]
}

export interface BenchCollectorInit {
  pace: PaceName
  settings: ControlSettings
  code: string
}

/**
 * What agents need of a collector, over HTTP and without a database: the routes, passes, signed orders, receipts and the real
 * control loop. It trusts whoever calls, as only the bench's own agents do.
 */
export class BenchCollector {
  /** By agent id. */
  readonly joined = new Map<string, Joined>()
  estimate: Estimate | null = null
  private readonly overlayId = 'overlay-bench'
  private readonly keys = generateKeys()
  private readonly tokens = new Map<string, string>()
  private readonly random: Random
  private readonly init: BenchCollectorInit
  private readonly server: Server
  private control: ControlState
  private before: Snapshot | null = null
  private orders: { proof: ReturnType<typeof signOrders>; issuedAtMs: number } | null = null
  private timer: NodeJS.Timeout | null = null

  constructor({ random }: { random: Random }, init: BenchCollectorInit) {
    this.random = random
    this.init = init
    this.control = initialControl(performance.now(), PACES[init.pace])
    this.server = createServer((request, response) => {
      this.answer(request).then(
        (reply) =>
          response
            .writeHead(200, { 'content-type': 'application/json', 'accept-encoding': 'gzip' })
            .end(JSON.stringify(reply)),
        (error: unknown) => response.writeHead(500).end(String(error)),
      )
    })
  }

  /** @returns its address */
  async start(): Promise<string> {
    await new Promise<void>((resolve) => this.server.listen(0, '127.0.0.1', resolve))
    this.evaluateLater()
    return `http://127.0.0.1:${(this.server.address() as AddressInfo).port}`
  }

  async stop(): Promise<void> {
    if (this.timer) clearTimeout(this.timer)
    this.server.closeAllConnections()
    await new Promise((resolve) => this.server.close(resolve))
  }

  find(name: string): Joined {
    const joined = [...this.joined.values()].find((one) => one.name === name)
    if (!joined) throw new Error(`${name} has not enrolled.`)
    return joined
  }

  private async answer(
    request: IncomingMessage,
  ): Promise<EnrolReply | SessionReply | ReportReply | BatchReply> {
    const chunks: Buffer[] = []
    for await (const chunk of request) chunks.push(chunk)
    const body = Buffer.concat(chunks)
    const plain = request.headers['content-encoding'] === 'gzip' ? gunzipSync(body) : body
    const content: unknown = JSON.parse(plain.toString('utf8'))
    switch (request.url) {
      case '/api/agent/enrol':
        return this.enrol(content)
      case '/api/agent/session':
        return this.session(content)
      case '/api/agent/report':
        return this.report(content, request.headers.authorization?.slice('Bearer '.length) ?? '', {
          plain: plain.length,
          wire: body.length,
        })
      case BATCH_PATH:
        return this.batch(content)
      default:
        throw new Error(`There is nothing at ${request.url}.`)
    }
  }

  private async enrol(content: unknown): Promise<EnrolReply> {
    const { name, publicKey } = enrolRequestSchema.parse(content)
    const agentId = `agent-${name}`
    const joined = {
      name,
      key: publicKey,
      joinedAtMs: performance.now(),
      last: null,
      reportBytes: [],
    }
    this.joined.set(agentId, joined)
    return {
      agentId,
      overlay: { id: this.overlayId, slug: 'bench', name: 'Bench' },
      pace: this.init.pace,
      weights: 'delivered',
      disclosure: this.init.settings.disclosure,
      overlayKey: this.keys.publicKey,
      ...(await this.passFor(agentId, joined)),
    }
  }

  private async session(content: unknown): Promise<SessionReply> {
    const { agentId } = sessionRequestSchema.parse(content)
    const token = randomBytes(16).toString('base64url')
    this.tokens.set(token, agentId)
    const now = Date.now()
    return {
      token,
      expiresAt: new Date(now + 3_600_000).toISOString(),
      serverTime: new Date(now).toISOString(),
      disclosure: this.init.settings.disclosure,
      pace: this.init.pace,
      ...(await this.passFor(agentId, this.of(agentId))),
    }
  }

  private async report(
    content: unknown,
    token: string,
    bytes: Joined['reportBytes'][number],
  ): Promise<ReportReply> {
    const { protocol, wantsReceipt, relayed: _, ...report } = reportRequestSchema.parse(content)
    const agentId = this.tokens.get(token) ?? ''
    const joined = this.of(agentId)
    joined.last = { report, receivedAtMs: performance.now() }
    joined.reportBytes.push(bytes)
    const ordersAgeMs = performance.now() - (this.orders?.issuedAtMs ?? performance.now())
    const proof = this.orders?.proof ?? null
    if (protocol < 2) return { orders: proof ? JSON.parse(proof.text) : null, ordersAgeMs }
    const statement = statementOf(agentId, report)
    const receipt = wantsReceipt ? signReceipt(this.overlayId, statement, this.keys) : undefined
    return { orders: null, signedOrders: proof, ordersAgeMs, receipt }
  }

  /** Reports of many agents, without sessions. */
  private batch(content: unknown): BatchReply {
    const receipts: BatchReply['receipts'] = []
    for (const { agentId, report: request } of reportBatchSchema.parse(content)) {
      const { protocol: _, wantsReceipt, relayed: __, ...report } = request
      this.of(agentId).last = { report, receivedAtMs: performance.now() }
      if (!wantsReceipt) continue
      const receipt = signReceipt(this.overlayId, statementOf(agentId, report), this.keys)
      receipts.push({ agentId, receipt })
    }
    const ordersAgeMs = performance.now() - (this.orders?.issuedAtMs ?? performance.now())
    return { signedOrders: this.orders?.proof ?? null, ordersAgeMs, receipts }
  }

  /** In haste as the orders say, else at the pace. */
  private evaluateLater(): void {
    this.timer = setTimeout(() => {
      this.evaluate()
      this.evaluateLater()
    }, this.control.intervalMs ?? PACES[this.init.pace].intervalMs)
  }

  private evaluate(): void {
    const now: Snapshot = {
      atMs: performance.now(),
      agents: [...this.joined].map(([agentId, { joinedAtMs, last }]) => ({ agentId, joinedAtMs, last })),
    }
    const sequence = this.control.sequence + 1
    const { control, orders, estimate } = evaluateOverlay({
      control: this.control,
      before: this.before,
      now,
      settings: this.init.settings,
      sequence,
      random: this.random,
    })
    this.before = now
    this.control = control
    this.estimate = estimate
    const proof = signOrders(this.overlayId, JSON.stringify(orders), this.keys)
    this.orders = { proof, issuedAtMs: now.atMs }
  }

  private of(agentId: string): Joined {
    const joined = this.joined.get(agentId)
    if (!joined) throw new Error(`No agent "${agentId}" has enrolled.`)
    return joined
  }

  private async passFor(agentId: string, { name, key }: Joined) {
    const issuedAt = Math.floor(Date.now() / 1000)
    const expiresAt = issuedAt + PASS_SECONDS
    const claims = { overlayId: this.overlayId, agentId, name, key, issuedAt, expiresAt }
    return {
      pass: await signPass(this.keys.privateKey, claims),
      passExpiresAt: new Date(expiresAt * 1000).toISOString(),
    }
  }
}
