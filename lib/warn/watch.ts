import { type Clock, sleep } from '@/lib/collector/clock'
import { enterEvent } from '@/lib/collector/events-store'
import { query } from '@/lib/collector/query'
import type { EntityManager } from '@/lib/db'
import type { Log } from '@/lib/http/runtime'
import type { NewMessage } from '@/lib/notify/outbox'
import { pulse } from '@/lib/notify/pulse'
import { advance, type RuleNow } from './advance'
import { floorValue } from './condition'
import type { WarnFacts } from './facts'
import type { Fall, Mean } from './falling'
import { readPulses } from './heartbeat'
import type { IncidentNow } from './incident-now'
import { type IncidentPlan, planIncident } from './plan'
import * as load from './watch-load'
import * as write from './watch-write'
import { callOrdersAt, coveredAt } from './whom'

export const LOOK_EVERY_MS = 10_000
const HOUR_MS = 60 * 60_000

export interface WatchComponents {
  forkEm(): Promise<EntityManager>
  now(): Date
  clock: Clock
  log: Log
  newId(): string
  fallOf(
    means: readonly Mean[],
    init: { floorLambda2: number | null; withinMs: number; nowMs: number },
  ): Fall | null
  /** Into the outbox, inside the transaction. */
  enqueue(em: EntityManager, messages: readonly NewMessage[], now: Date): Promise<void>
}

/**
 * Takes the rules of every overlay through new readings, as one of any number of processes that do: whoever comes first
 * looks at an overlay, in one transaction, and whoever finds it taken leaves it.
 */
export class Watch {
  readonly #components: WatchComponents
  readonly #everyMs: number
  #stopping = new AbortController()
  #running: Promise<void> | null = null

  constructor(components: WatchComponents, init: { everyMs?: number } = {}) {
    this.#components = components
    this.#everyMs = init.everyMs ?? LOOK_EVERY_MS
  }

  start(): void {
    if (this.#running) return
    this.#stopping = new AbortController()
    this.#running = this.#run(this.#stopping.signal)
  }

  /** Waits for the look under way. */
  async stop(): Promise<void> {
    this.#stopping.abort()
    await this.#running
    this.#running = null
  }

  /** Looks at every overlay once. */
  async look(signal: AbortSignal = new AbortController().signal): Promise<void> {
    const { forkEm, log, now } = this.#components
    let failed = 0
    const { evaluatingMs } = await readPulses(await forkEm())
    for (const overlayId of await load.overlaysWatched(await forkEm())) {
      if (signal.aborted) return
      try {
        await this.#lookAt(await forkEm(), overlayId, evaluatingMs)
      } catch (error) {
        failed += 1
        log.error({ overlayId, err: error }, 'the rules of an overlay could not be evaluated')
      }
    }
    if (failed === 0) await pulse(await forkEm(), 'evaluating', now())
  }

  async #run(signal: AbortSignal): Promise<void> {
    const { clock, log } = this.#components
    while (!signal.aborted) {
      try {
        await this.look(signal)
      } catch (error) {
        if (!signal.aborted) log.warn({ err: error }, 'rules cannot be evaluated at the moment')
      }
      await sleep(clock, this.#everyMs, signal)
    }
  }

  async #lookAt(em: EntityManager, overlayId: string, evaluatingMs: number | null): Promise<void> {
    await em.transactional(async (tx) => {
      const [lock] = await query<{ taken: boolean }>(
        tx,
        'select pg_try_advisory_xact_lock(hashtextextended(?, 0)) as taken',
        [`thinspan:watch:${overlayId}`],
      )
      if (!lock?.taken) return
      const nowMs = this.#components.now().getTime()
      if (evaluatingMs !== null && nowMs - evaluatingMs > load.SILENCE_MS)
        await write.writeAway(tx, overlayId, { fromMs: evaluatingMs, toMs: nowMs })
      const teams = await load.loadRules(tx, overlayId)
      const seen = teams.flatMap(({ rules }) => rules.flatMap(({ evaluatedAtMs }) => evaluatedAtMs ?? []))
      const sinceMs = Math.min(nowMs, ...seen)
      const { series, last } = await load.loadFacts(tx, overlayId, { sinceMs, nowMs })
      const facts = await withSilence(tx, { overlayId, series, last, nowMs })
      await write.lockOverlay(tx, overlayId)
      for (const { teamId, rules } of teams)
        await this.#lookFor(tx, { overlayId, teamId, rules, facts, sinceMs, nowMs })
    })
  }

  async #lookFor(em: EntityManager, init: TeamLook): Promise<void> {
    const { enqueue, newId } = this.#components
    const { overlayId, teamId, rules, facts, sinceMs, nowMs } = init
    const falls = await this.#falls(em, init)
    const { states, changes } = advance(rules, facts, ({ id }) => falls.get(id) ?? null)
    const people = await load.loadPeople(em, teamId)
    const windows = await load.loadWindows(em, overlayId, teamId)
    const silent =
      windows.length > 0
        ? await load.loadSilentLabels(em, { overlayId, teamId, sinceMs: nowMs - load.SILENCE_MS })
        : []
    const before = await load.loadIncident(em, overlayId, teamId)
    const plan = planIncident({
      atMs: nowMs,
      rules,
      changes,
      incident: before,
      callOrders: callOrdersAt(people, nowMs),
      covered: coveredAt(rules, windows, { atMs: nowMs, silent }),
      newId,
    })
    await write.writeStates(em, states, nowMs)
    await write.writeIncident(em, { overlayId, teamId }, plan)
    if (!plan.incident) return
    const { id } = plan.incident
    if (plan.incident.clearedAtMs === null) {
      const fromMs = plan.isNew ? beganMs(plan.incident, rules) : sinceMs
      await write.writeHappenings(em, id, { overlayId, sinceMs: fromMs, untilMs: nowMs })
    }
    const newest = facts.at(-1)
    if (newest && plan.incident.clearedAtMs === null) await write.writeReading(em, id, newest)
    await enqueue(em, await write.messagesOf(em, id, plan.tell, nowMs), new Date(nowMs))
    await sayIn(em, { overlayId, teamId }, plan)
  }

  async #falls(
    em: EntityManager,
    { overlayId, rules, facts, nowMs }: TeamLook,
  ): Promise<Map<string, Fall | null>> {
    const falls = new Map<string, Fall | null>()
    const usual = facts.at(-1)?.usual ?? null
    for (const { id, settings } of rules) {
      if (settings.kind !== 'falling') continue
      const { means, windowHours, withinHours, floor } = settings
      const series = await load.loadMeans(em, overlayId, {
        means,
        fromMs: nowMs - windowHours * HOUR_MS,
        nowMs,
      })
      const floorLambda2 = floorValue(floor, usual)
      falls.set(id, this.#components.fallOf(series, { floorLambda2, withinMs: withinHours * HOUR_MS, nowMs }))
    }
    return falls
  }
}

/** What led to it happened before its rules had held for their on-delay. */
const LEADS_UP_MS = 5 * 60_000

function beganMs({ raisedAtMs, ruleIds }: IncidentNow, rules: readonly RuleNow[]): number {
  const delays = rules.filter(({ id }) => ruleIds.includes(id)).map(({ onDelaySeconds }) => onDelaySeconds)
  return raisedAtMs - 1000 * Math.max(0, ...delays) - LEADS_UP_MS
}

interface TeamLook {
  overlayId: string
  teamId: string
  rules: readonly RuleNow[]
  facts: readonly WarnFacts[]
  sinceMs: number
  nowMs: number
}

/**
 * Where no reading comes any more, nobody who joined is heard; while they come, or where nobody is joined, the series is
 * what was read.
 */
async function withSilence(
  em: EntityManager,
  init: { overlayId: string; series: readonly WarnFacts[]; last: WarnFacts | null; nowMs: number },
): Promise<readonly WarnFacts[]> {
  const { overlayId, series, last, nowMs } = init
  if (!last || nowMs - last.atMs < load.SILENCE_MS) return series
  const joined = await load.countJoined(em, overlayId)
  if (joined === 0) return series
  return [...series, { ...last, atMs: nowMs, isFresh: false, joined, heard: 0, linksMeasured: 0 }]
}

/** Pages that are open hear of it. */
async function sayIn(
  em: EntityManager,
  { overlayId, teamId }: { overlayId: string; teamId: string },
  { isNew, entries, incident }: IncidentPlan,
): Promise<void> {
  const isReopened = entries.some(({ kind }) => kind === 'reopened')
  if (incident && (isNew || isReopened))
    await enterEvent(em, overlayId, { kind: 'incident-raised', text: incident.sentence, teamId })
  if (entries.some(({ kind }) => kind === 'cleared-all'))
    await enterEvent(em, overlayId, { kind: 'incident-cleared', text: 'Nothing is raised any more', teamId })
}
