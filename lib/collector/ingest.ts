import type { AgentCaller } from '@/lib/auth/caller'
import { sha256Hex } from '@/lib/auth/secrets'
import type { EntityManager } from '@/lib/db'
import type { PassGrant } from '@/lib/protocol'
import { enterAway } from './away'
import type { Clock } from './clock'
import { clonedEvent, clonedKey } from './clone'
import { disclosed } from './disclosed'
import { enterEventOnce } from './events-store'
import {
  type Admitted,
  type Answer,
  type Arrival,
  admit,
  type Entry,
  type Incoming,
  refuse,
  withResolvers,
} from './ingest-entry'
import { judgeArrivals } from './ingest-judge'
import { ReplyMaker } from './ingest-reply'
import { countLate, findHeld, findSenders, type Sender, type StateRow, storeStates } from './ingest-store'
import { PASS_LIFE_MS } from './passes'
import { openRelayed, type Relayed, relayedReply } from './relayed'
import { ReplyFactsReader } from './reply-facts'
import { CLONE_REPORTS, type HeldReport } from './report-check'
import { storeVectors, type VectorRow } from './vectors'

/** Reports wait this long for others to be stored with. */
export const BATCH_MS = 10
/** While so many batches are under way the next one grows instead: more at once would only wait for connections. */
export const BATCHES_AT_ONCE = 4
export const BATCH_MOST = 500
/** Last reports remembered, so that judging the next needs no second look into the database. */
export const REMEMBERED_MOST = 20_000

export type { Answer } from './ingest-entry'

/** What comes of a report, in two steps: who sent it, and the reply once it is stored. */
export interface Ticket {
  caller: Promise<AgentCaller>
  answer: Promise<Answer>
}

export interface IngestComponents {
  forkEm(): Promise<EntityManager>
  clock: Clock
}

/** An admitted request with its own report and those it delivers. */
interface Taken extends Admitted {
  own: Arrival
  relayed: Relayed[]
}

/** Takes reports in: many at a time, answered after they are stored. */
export class Ingest {
  readonly #components: IngestComponents
  readonly #passLifeMs: number
  readonly #remembered = new Map<string, HeldReport>()
  readonly #relayedPasses = new Map<string, number>()
  readonly #replyFacts: ReplyFactsReader
  readonly #running = new Set<Promise<void>>()
  #waiting: Entry[] = []
  #cancel: (() => void) | null = null
  /** A batch is to go as soon as one of those under way is over. */
  #isDue = false

  constructor(components: IngestComponents, init: { passLifeMs?: number } = {}) {
    this.#components = components
    this.#replyFacts = new ReplyFactsReader(components.clock)
    this.#passLifeMs = init.passLifeMs ?? PASS_LIFE_MS
  }

  submit(token: string, request: Incoming): Ticket {
    const entry: Entry = {
      tokenHash: sha256Hex(token),
      request,
      caller: withResolvers(),
      answer: withResolvers(),
    }
    // Whoever has been refused as a caller does not ask for the answer as well.
    entry.answer.promise.catch(() => undefined)
    this.#waiting.push(entry)
    if (this.#waiting.length >= BATCH_MOST) this.#flush()
    else if (!this.#isDue) this.#cancel ??= this.#components.clock.after(BATCH_MS, () => this.#flush())
    return { caller: entry.caller.promise, answer: entry.answer.promise }
  }

  /** Stores what waits and ends. */
  async stop(): Promise<void> {
    while (this.#waiting.length > 0 || this.#running.size > 0) {
      this.#flush()
      await Promise.all(this.#running)
    }
  }

  #flush(): void {
    this.#cancel?.()
    this.#cancel = null
    this.#isDue = this.#waiting.length > 0 && this.#running.size >= BATCHES_AT_ONCE
    if (this.#isDue) return
    const batch = this.#waiting.splice(0, BATCH_MOST)
    if (batch.length === 0) return
    if (this.#waiting.length > 0) this.#cancel = this.#components.clock.after(BATCH_MS, () => this.#flush())
    const run = this.#take(batch).catch((error: unknown) => {
      for (const entry of batch) refuse(entry, error)
    })
    const over = run.finally(() => {
      this.#running.delete(over)
      if (this.#isDue) this.#flush()
    })
    this.#running.add(over)
  }

  async #take(batch: readonly Entry[]): Promise<void> {
    const em = await this.#components.forkEm()
    const senders = await findSenders(em, [...new Set(batch.map(({ tokenHash }) => tokenHash))])
    const admitted = batch.flatMap((entry) => {
      const sender = admit(entry, senders.get(entry.tokenHash))
      return sender ? [{ entry, sender }] : []
    })
    const carried = await openRelayed(em, admitted, this.#components.clock.epochMs())
    const taken = admitted.map(
      (one): Taken => ({
        ...one,
        own: { sender: one.sender, report: one.entry.request, relayed: false, outcome: null },
        relayed: carried.get(one) ?? [],
      }),
    )
    // An agent's own word goes before what comes in a roundabout way.
    const arrivals = [...taken.map(({ own }) => own), ...taken.flatMap(({ relayed }) => arrivalsIn(relayed))]
    const held = await this.#heldBy(em, arrivals)
    const late = judgeArrivals(arrivals, held)
    // What replies are made from is looked up while the reports are stored.
    const making = this.#replies(em, taken)
    making.catch(() => undefined)
    await this.#store(em, arrivals, held)
    for (const arrival of late) await refuseClone(em, arrival)
    for (const { entry, own, sender } of taken)
      if (entry.request.away && own.outcome?.kind === 'stored')
        await enterAway(em, sender, entry.request.away)
    await this.#answer(taken, await making)
  }

  async #replies(em: EntityManager, taken: readonly Taken[]): Promise<ReplyMaker> {
    const maker = new ReplyMaker(
      { em, clock: this.#components.clock, reader: this.#replyFacts },
      { passLifeMs: this.#passLifeMs, relayedPasses: this.#relayedPasses },
    )
    await maker.load(new Set(taken.map(({ sender }) => sender.overlayId)))
    return maker
  }

  async #heldBy(em: EntityManager, arrivals: readonly Arrival[]): Promise<Map<string, HeldReport>> {
    const held = new Map<string, HeldReport>()
    const missing = new Set<string>()
    for (const { sender } of arrivals) {
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
    arrivals: readonly Arrival[],
    held: ReadonlyMap<string, HeldReport>,
  ): Promise<void> {
    const latest = new Map<string, StateRow>()
    for (const { sender, report, relayed, outcome } of arrivals) {
      if (outcome?.kind !== 'stored') continue
      const { agentId, overlayId } = sender
      latest.set(agentId, { agentId, overlayId, report: disclosed(report, sender.disclosure), relayed })
    }
    const rows = [...latest.values()]
    // First, so that a report that counts as stored has brought all it carried.
    await storeVectors(em, arrivals.flatMap(vectorsIn))
    const failed = await storeEach(em, rows)
    for (const arrival of arrivals) {
      const error = failed.get(arrival.sender.agentId)
      if (error !== undefined) arrival.outcome = { kind: 'refused', error }
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

  async #answer(taken: readonly Taken[], maker: ReplyMaker): Promise<void> {
    const isGood = ({ outcome }: Arrival) => outcome?.kind !== 'refused'
    const passes = await maker.renew(
      taken.filter(({ own }) => isGood(own)).map(({ sender }) => sender),
      taken.flatMap(({ relayed }) =>
        arrivalsIn(relayed)
          .filter(isGood)
          .map(({ sender }) => sender),
      ),
    )
    for (const one of taken) {
      const { entry, own, relayed, sender } = one
      if (own.outcome?.kind === 'refused') {
        entry.answer.reject(own.outcome.error)
        continue
      }
      const pass = passes.get(sender.agentId)
      entry.answer.resolve({
        ...(await maker.replyTo(one, own)),
        ...(pass ? { pass } : {}),
        ...(relayed.length > 0
          ? { relayed: await Promise.all(relayed.map((each) => replyTo(each, passes, maker))) }
          : {}),
        ...(own.outcome?.kind === 'repeated' ? { repeated: true as const } : {}),
      })
    }
  }
}

async function replyTo(each: Relayed, passes: ReadonlyMap<string, PassGrant>, maker: ReplyMaker) {
  const keyRings = 'outcome' in each.found ? await maker.ringsFor(each.found) : undefined
  return relayedReply(each, passes.get(each.signed.agentId) ?? null, keyRings)
}

function vectorsIn({ sender, report, outcome }: Arrival): VectorRow[] {
  const { agentId, overlayId, disclosure } = sender
  if (outcome?.kind !== 'stored' || disclosure === 'named') return []
  return (report.masked ?? []).map((vector) => ({ ...vector, agentId, overlayId }))
}

function arrivalsIn(relayed: readonly Relayed[]): Arrival[] {
  return relayed.flatMap(({ found }) => ('outcome' in found ? [found] : []))
}

function isHeldBy(sender: Sender, { incarnation, number }: HeldReport): boolean {
  return sender.incarnation === incarnation && sender.number === number
}

/** A report of a former start: once there are more than stragglers can be, its sender is a second program. */
async function refuseClone(em: EntityManager, arrival: Arrival): Promise<void> {
  const { sender, report } = arrival
  const late = await countLate(em, sender.agentId, report)
  if (late === null || late < CLONE_REPORTS) return
  arrival.outcome = { kind: 'refused', error: clonedKey(sender.name, 'Another program reports with') }
  await enterEventOnce(em, sender.overlayId, clonedEvent(sender.name))
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
