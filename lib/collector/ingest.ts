import { OverlaySchema } from '@/entities'
import type { AgentCaller } from '@/lib/auth/caller'
import { sha256Hex } from '@/lib/auth/secrets'
import type { EntityManager } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { assertStorable } from '@/lib/http/storable'
import type { Report } from '@/lib/method/report'
import type { PassGrant, ReportReply } from '@/lib/protocol'
import type { Clock } from './clock'
import { findHeld, findOrders, findSenders, type Sender, type StateRow, storeStates } from './ingest-store'
import { grantPass, isPassDue, PASS_LIFE_MS } from './passes'
import { query } from './query'
import { type HeldReport, heldOf, judgeReport } from './report-check'
import { agentEnded } from './session'

/** Reports wait this long for others to be stored with. */
export const BATCH_MS = 20
export const BATCH_MOST = 500
/** Last reports remembered, so that judging the next needs no second look into the database. */
export const REMEMBERED_MOST = 20_000

export interface Answer extends ReportReply {
  /** Nothing was stored: a report as new or newer was there already. */
  repeated?: true
}

/** What comes of a report, in two steps: who sent it, and the reply once it is stored. */
export interface Ticket {
  caller: Promise<AgentCaller>
  answer: Promise<Answer>
}

export interface IngestComponents {
  forkEm(): Promise<EntityManager>
  clock: Clock
}

interface Entry {
  tokenHash: string
  report: Report
  caller: PromiseWithResolvers<AgentCaller>
  answer: PromiseWithResolvers<Answer>
}

interface Judged {
  entry: Entry
  sender: Sender
  repeated: boolean
}

/** Takes reports in: many at a time, answered after they are stored. */
export class Ingest {
  readonly #components: IngestComponents
  readonly #passLifeMs: number
  readonly #remembered = new Map<string, HeldReport>()
  readonly #running = new Set<Promise<void>>()
  #waiting: Entry[] = []
  #cancel: (() => void) | null = null

  constructor(components: IngestComponents, init: { passLifeMs?: number } = {}) {
    this.#components = components
    this.#passLifeMs = init.passLifeMs ?? PASS_LIFE_MS
  }

  submit(token: string, report: Report): Ticket {
    const entry: Entry = {
      tokenHash: sha256Hex(token),
      report,
      caller: withResolvers(),
      answer: withResolvers(),
    }
    // Whoever has been refused as a caller does not ask for the answer as well.
    entry.answer.promise.catch(() => undefined)
    try {
      assertStorable(report)
    } catch (error) {
      refuse(entry, error)
      return { caller: entry.caller.promise, answer: entry.answer.promise }
    }
    this.#waiting.push(entry)
    if (this.#waiting.length >= BATCH_MOST) this.#flush()
    else this.#cancel ??= this.#components.clock.after(BATCH_MS, () => this.#flush())
    return { caller: entry.caller.promise, answer: entry.answer.promise }
  }

  /** Stores what waits and ends. */
  async stop(): Promise<void> {
    this.#flush()
    await Promise.all(this.#running)
  }

  #flush(): void {
    this.#cancel?.()
    this.#cancel = null
    const batch = this.#waiting
    this.#waiting = []
    if (batch.length === 0) return
    const run = this.#take(batch).catch((error: unknown) => {
      for (const entry of batch) refuse(entry, error)
    })
    this.#running.add(run)
    void run.finally(() => this.#running.delete(run))
  }

  async #take(batch: readonly Entry[]): Promise<void> {
    const em = await this.#components.forkEm()
    const senders = await findSenders(em, [...new Set(batch.map(({ tokenHash }) => tokenHash))])
    const known = batch.flatMap((entry) => {
      const sender = admit(entry, senders.get(entry.tokenHash))
      return sender ? [{ entry, sender }] : []
    })
    const held = await this.#heldBy(em, known)
    const judged = judge(known, held)
    await this.#store(em, judged, held)
    await this.#answer(em, judged)
  }

  async #heldBy(em: EntityManager, known: readonly { sender: Sender }[]): Promise<Map<string, HeldReport>> {
    const held = new Map<string, HeldReport>()
    const missing = new Set<string>()
    for (const { sender } of known) {
      if (sender.incarnation === null) continue
      const remembered = this.#remembered.get(sender.agentId)
      // Another process may have taken a report in since.
      if (remembered && isHeldBy(sender, remembered)) held.set(sender.agentId, remembered)
      else missing.add(sender.agentId)
    }
    for (const [agentId, report] of await findHeld(em, [...missing])) held.set(agentId, report)
    return held
  }

  async #store(
    em: EntityManager,
    judged: readonly Judged[],
    held: ReadonlyMap<string, HeldReport>,
  ): Promise<void> {
    const latest = new Map<string, StateRow>()
    for (const { entry, sender, repeated } of judged) {
      if (repeated) continue
      const { agentId, overlayId } = sender
      latest.set(agentId, { agentId, overlayId, report: disclosed(entry.report, sender) })
    }
    const rows = [...latest.values()]
    const failed = await storeEach(em, rows)
    for (const { entry, sender } of judged) {
      const error = failed.get(sender.agentId)
      if (error !== undefined) entry.answer.reject(error)
    }
    for (const { agentId } of rows) {
      const now = held.get(agentId)
      if (now && !failed.has(agentId)) this.#remember(agentId, now)
    }
  }

  #remember(agentId: string, held: HeldReport): void {
    this.#remembered.delete(agentId)
    this.#remembered.set(agentId, held)
    if (this.#remembered.size <= REMEMBERED_MOST) return
    const [oldest] = this.#remembered.keys()
    if (oldest !== undefined) this.#remembered.delete(oldest)
  }

  async #answer(em: EntityManager, judged: readonly Judged[]): Promise<void> {
    const orders = await findOrders(em, [...new Set(judged.map(({ sender }) => sender.overlayId))])
    const readMs = this.#components.clock.monotonicMs()
    const passes = await this.#renewPasses(em, judged)
    for (const { entry, sender, repeated } of judged) {
      const current = orders.get(sender.overlayId)
      const pass = passes.get(sender.tokenHash)
      entry.answer.resolve({
        orders: current?.orders ?? null,
        ordersAgeMs: current?.orders ? current.ageMs + this.#components.clock.monotonicMs() - readMs : 0,
        ...(pass ? { pass } : {}),
        ...(repeated ? { repeated: true as const } : {}),
      })
    }
  }

  async #renewPasses(em: EntityManager, judged: readonly Judged[]): Promise<Map<string, PassGrant>> {
    const nowMs = this.#components.clock.epochMs()
    const due = judged.filter(({ sender }) => isPassDue(sender.passExpiresAtMs, nowMs, this.#passLifeMs))
    const grants = new Map<string, PassGrant>()
    for (const { sender } of due) {
      if (grants.has(sender.tokenHash)) continue
      const overlay = await em.findOneOrFail(OverlaySchema, sender.overlayId)
      const issuer = { overlayId: overlay.id, publicKey: overlay.publicKey, privateKey: overlay.privateKey }
      const grant = await grantPass(issuer, sender, nowMs, this.#passLifeMs)
      await query(em, 'update agent_sessions set pass_expires_at = ? where token_hash = ?', [
        grant.passExpiresAt,
        sender.tokenHash,
      ])
      grants.set(sender.tokenHash, grant)
    }
    return grants
  }
}

/** @returns null where the entry has been refused */
function admit(entry: Entry, sender: Sender | undefined): Sender | null {
  if (!sender)
    refuse(entry, new AppError('bad-token', 'The session token is not known. Open a session first.'))
  else if (sender.expired)
    refuse(entry, new AppError('session-expired', 'Open a new session and report again.'))
  else if (sender.state !== 'joined') refuse(entry, agentEnded())
  else {
    const { agentId, overlayId, teamId, name } = sender
    entry.caller.resolve({ kind: 'agent', agentId, overlayId, teamId, name })
    return sender
  }
  return null
}

function isHeldBy(sender: Sender, { incarnation, previousIncarnation, number }: HeldReport): boolean {
  return (
    sender.incarnation === incarnation &&
    sender.previousIncarnation === previousIncarnation &&
    sender.number === number
  )
}

/** In order of arrival; a report is judged by the one before it in the same batch. */
function judge(known: readonly { entry: Entry; sender: Sender }[], held: Map<string, HeldReport>): Judged[] {
  return known.flatMap(({ entry, sender }) => {
    const { report } = entry
    const before = held.get(sender.agentId) ?? null
    const verdict = judgeReport(before, report)
    if (verdict.kind === 'falling') {
      const { colony, counter, from, to } = verdict
      const detail = `In colony ${colony} "${counter}" fell from ${from} to ${to}. Counters only grow within an incarnation and seeding: start the agent anew.`
      entry.answer.reject(
        new AppError('falling-counters', detail, { members: { colony, counter, from, to } }),
      )
      return []
    }
    const repeated = verdict.kind === 'repeated'
    if (!repeated) held.set(sender.agentId, heldOf(before, report))
    return [{ entry, sender, repeated }]
  })
}

/** One report that the database cannot hold must not cost the others of its batch. @returns errors by agent */
async function storeEach(em: EntityManager, rows: readonly StateRow[]): Promise<Map<string, unknown>> {
  const failed = new Map<string, unknown>()
  try {
    await storeStates(em, rows)
  } catch (error) {
    if (!isAboutData(error)) throw error
    for (const row of rows)
      await storeStates(em, [row]).catch((reason: unknown) => failed.set(row.agentId, reason))
  }
  return failed
}

/** Classes 22 and 23: data and constraints (PostgreSQL documentation, appendix A). */
function isAboutData(error: unknown): boolean {
  return error instanceof Error && 'code' in error && /^2[23]/.test(String(error.code))
}

/** What the overlay does not disclose is not stored, even where an agent on old orders still says it. */
function disclosed(report: Report, { disclosure }: Sender): Report {
  if (disclosure !== 'sealed' || report.node.links.length === 0) return report
  return { ...report, node: { ...report.node, links: [] } }
}

function refuse(entry: Entry, error: unknown): void {
  entry.caller.reject(error)
  entry.answer.reject(error)
}

interface PromiseWithResolvers<T> {
  promise: Promise<T>
  resolve(value: T): void
  reject(reason: unknown): void
}

function withResolvers<T>(): PromiseWithResolvers<T> {
  let resolve: (value: T) => void = () => {}
  let reject: (reason: unknown) => void = () => {}
  const promise = new Promise<T>((res, rej) => {
    resolve = res
    reject = rej
  })
  return { promise, resolve, reject }
}
