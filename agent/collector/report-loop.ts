import type { KeyObject } from 'node:crypto'
import type { Random } from '@/lib/method/random'
import type { Report } from '@/lib/method/report'
import { MOST_RECEIPT_AGE_INTERVALS, RECEIPT_INTERVALS } from '@/lib/method/statement'
import {
  AGENT_PROTOCOL,
  type AwaySummary,
  MAX_RELAYED_REPORT_BYTES,
  type ReportReply,
  type SignedReport,
  signReport,
} from '@/lib/protocol'
import { type Clock, sleep } from '../clock'
import type { Logger } from '../logger'
import { type CollectorError, type CollectorResult, describeCollectorError, isEnded } from './client'
import { attemptLimitMs, LEAST_WAIT_MS, waitAfter } from './report-plan'
import type { Reporter } from './reporter'

/** What carries reports where the collector cannot be reached, and brings others' along. */
export interface Carriers {
  readonly isNeeded: boolean
  noteOwn(delivered: boolean): void
  send(report: SignedReport): number
  take(): SignedReport[]
  answer(replies: NonNullable<ReportReply['relayed']>): void
}

export interface ReportLoopComponents {
  clock: Clock
  random: Random
  logger: Logger
  reporter: Reporter
  carriers: Carriers
  /** The report of this moment. */
  report: () => Report
}

export interface ReportLoopInit {
  agentId: string
  intervalMs: () => number
  privateKey: () => KeyObject
  /** Before each report. */
  prepare: (signal: AbortSignal) => Promise<void>
  /** What to tell of times without a collector. */
  away: () => AwaySummary[]
  /** A reply came; its orders were this old on arrival. */
  onReply: (reply: ReportReply, report: Report, ordersAgeMs: number) => void
  /** After every attempt. */
  onAttempt: (delivered: boolean) => void
  /** The collector does not count this agent any more. The loop ends. */
  onEnded: (detail: string) => void
}

/** Reports once per interval, come what may. */
export class ReportLoop {
  private readonly components: ReportLoopComponents
  private readonly init: ReportLoopInit
  private delivered = 0
  private failed = 0
  private failedInARow = 0
  private sinceReceipt = RECEIPT_INTERVALS
  private deliveredAtMs: number | null = null
  private tookMs: number | null = null
  private error: string | null = null
  private isOver = false

  constructor(components: ReportLoopComponents, init: ReportLoopInit) {
    this.components = components
    this.init = init
  }

  get counts() {
    const { delivered, failed, deliveredAtMs, tookMs } = this
    return { delivered, failed, deliveredAtMs, tookMs, lastError: this.error }
  }

  /** Of the last report that was not delivered, or of what came with one that was. */
  noteError(error: string): void {
    this.error = error
  }

  async run(signal: AbortSignal): Promise<void> {
    const { clock, random } = this.components
    await sleep(clock, this.init.intervalMs() * random.uniform(), signal)
    while (!signal.aborted && !this.isOver) {
      const startedAtMs = clock.monotonicMs()
      const waitMs = await this.once(signal)
      await sleep(clock, Math.max(waitMs / 4, waitMs - (clock.monotonicMs() - startedAtMs)), signal)
    }
  }

  /** @returns how long to wait until the next, counted from the start of this one */
  async once(signal: AbortSignal): Promise<number> {
    const { clock, random, carriers } = this.components
    await this.init.prepare(signal)
    const sentAtMs = clock.monotonicMs()
    const report = this.components.report()
    const wasNeeded = carriers.isNeeded
    if (wasNeeded) this.relay(report)
    const waiting = this.relayWhileWaiting()
    const result = await this.attempt(report, signal).finally(waiting.end)
    if (signal.aborted) return 0
    const intervalMs = this.init.intervalMs()
    if (result.ok) this.succeeded(result.value, report, sentAtMs)
    else this.noteFailure(result.error)
    carriers.noteOwn(result.ok)
    if (!wasNeeded && carriers.isNeeded && !waiting.hasRelayed()) this.relay(report)
    this.init.onAttempt(result.ok)
    const error = result.ok ? null : result.error
    return waitAfter(error, { failedInARow: this.failedInARow, intervalMs, uniform: random.uniform() })
  }

  /**
   * A way that swallows what is sent gives no answer for as long as an attempt may take, and an agent that only waits for it
   * is soon unheard: from the second interval of waiting on, neighbours carry what is new.
   */
  private relayWhileWaiting(): { end: () => void; hasRelayed: () => boolean } {
    const { clock, carriers } = this.components
    let hasRelayed = false
    let cancel = () => {}
    const arm = () => {
      cancel = clock.after(Math.max(LEAST_WAIT_MS, this.init.intervalMs()), () => {
        carriers.noteOwn(false)
        if (carriers.isNeeded) this.relay(this.components.report())
        hasRelayed ||= carriers.isNeeded
        arm()
      })
    }
    arm()
    return { end: () => cancel(), hasRelayed: () => hasRelayed }
  }

  private async attempt(report: Report, signal: AbortSignal): Promise<CollectorResult<ReportReply>> {
    const { clock, reporter, carriers } = this.components
    const limitMs = attemptLimitMs(this.failedInARow, this.init.intervalMs())
    const abort = new AbortController()
    const onAbort = () => abort.abort()
    const cancel = limitMs === null ? () => {} : clock.after(limitMs, onAbort)
    signal.addEventListener('abort', onAbort, { once: true })
    const relayed = carriers.take()
    const away = this.init.away()
    const request = {
      ...report,
      protocol: AGENT_PROTOCOL,
      ...(this.sinceReceipt >= RECEIPT_INTERVALS ? { wantsReceipt: true } : {}),
      ...(relayed.length > 0 ? { relayed } : {}),
      ...(away.length > 0 ? { away } : {}),
    }
    try {
      return await reporter.deliver(request, abort.signal)
    } finally {
      cancel()
      signal.removeEventListener('abort', onAbort)
    }
  }

  private succeeded(reply: ReportReply, report: Report, sentAtMs: number): void {
    const { clock, logger, carriers } = this.components
    if (this.failedInARow > 0) logger.info({ after: this.failedInARow }, 'reports are delivered again')
    const nowMs = clock.monotonicMs()
    this.delivered += 1
    this.failedInARow = 0
    this.error = null
    this.deliveredAtMs = nowMs
    this.tookMs = nowMs - sentAtMs
    // Neighbours hold a receipt against what they heard of late: one that was long on its way would accuse its bearer.
    const isLate = this.tookMs > MOST_RECEIPT_AGE_INTERVALS * this.init.intervalMs()
    const kept = isLate ? { ...reply, receipt: undefined } : reply
    this.sinceReceipt = kept.receipt ? 1 : this.sinceReceipt + 1
    if (reply.relayed) carriers.answer(reply.relayed)
    // The orders aged on the way too; counting the whole exchange makes them expire early rather than late.
    this.init.onReply(kept, report, reply.ordersAgeMs + this.tookMs)
  }

  private noteFailure(error: CollectorError): void {
    this.failed += 1
    this.failedInARow += 1
    this.error = describeCollectorError(error)
    const { logger } = this.components
    // At the 1st, 2nd, 4th, 8th … in a row: a collector that is away for days must not fill a disk with words.
    const isWorthALine = Number.isInteger(Math.log2(this.failedInARow))
    const facts = { error, failedInARow: this.failedInARow }
    logger[isWorthALine ? 'warn' : 'debug'](facts, 'a report was not delivered')
    if (!isEnded(error)) return
    this.isOver = true
    this.init.onEnded(this.error)
  }

  private relay(report: Report): void {
    const { reporter, carriers } = this.components
    const { agentId } = this.init
    const at = new Date(reporter.nowMs()).toISOString()
    carriers.send(signReport({ agentId, at, body: bodyOf(report) }, this.init.privateKey()))
  }
}

/** As `POST /api/agent/report` takes it; one that is too long for neighbours leaves its links out. */
function bodyOf(report: Report): string {
  const body = JSON.stringify({ ...report, protocol: AGENT_PROTOCOL })
  if (Buffer.byteLength(body) <= MAX_RELAYED_REPORT_BYTES) return body
  return JSON.stringify({ ...report, node: { ...report.node, links: [] }, protocol: AGENT_PROTOCOL })
}
