import type { Log } from '@/lib/http/runtime'
import {
  DEFAULT_SETTINGS,
  evaluateAny,
  initialControl,
  isHeard,
  openRounds,
  type Snapshot,
  withRound,
} from '@/lib/method/control'
import type { Disclosure, Orders, Walk } from '@/lib/method/orders'
import { PACES } from '@/lib/method/pace'
import type { Random } from '@/lib/method/random'
import { MAX_SHUT } from '@/lib/protocol'
import { type AuditInput, type AuditMemory, auditAgents, BLANK_AUDIT } from './audit'
import { type Clock, sleep } from './clock'
import type { ExactCheck } from './exact'
import { fleetFacts, withFleetFacts } from './fleet-facts'
import { type JudgedAgent, judge } from './judge'
import type { LeaderStore, Loaded, LoadedAgent, Round } from './leader-store'
import { LinkWatch } from './link-watch'
import { BLANK_MEMORY, STATE_VERSION, type StoredState } from './memory'
import type { Moments } from './moments'
import type { PlannedLinks } from './planned'
import type { KeptReading } from './reading'
import { linksFor } from './rehearsal/links'
import { planRehearsals, tellRehearsals } from './rehearsal/round'
import type { Upkeep } from './upkeep'
import { type Usual, usualNow } from './usual'

/** A round that fails is tried anew at the next interval; after so many in a row the overlay is given up. */
export const FAILURES_MOST = 5

export interface TermComponents {
  store: Pick<LeaderStore, 'claim' | 'load' | 'write'>
  usual: Pick<Usual, 'at'>
  upkeep: Pick<Upkeep, 'look'>
  moments: Pick<Moments, 'look'>
  planned: Pick<PlannedLinks, 'look'>
  exact: Pick<ExactCheck, 'latest' | 'look'>
  clock: Clock
  random: Random
  log: Log
}

export type TermEnd = 'stopped' | 'nothing-joined' | 'replaced' | 'failing'

/** One leader's time with one overlay: a round every report interval, from the claim to the end. */
export class Term {
  readonly #components: TermComponents
  readonly #overlayId: string
  readonly #links = new LinkWatch()
  #before: Snapshot | null = null
  #sequence = 0
  #state: StoredState | null = null
  #last: Round | null = null
  #issuedMs = 0
  #audit: AuditMemory = BLANK_AUDIT
  #hasty = false
  #wake: () => void = () => {}
  /** How long rounds took, loading to commit, milliseconds. */
  readonly rounds = { count: 0, totalMs: 0, longestMs: 0 }

  constructor(components: TermComponents, init: { overlayId: string }) {
    this.#components = components
    this.#overlayId = init.overlayId
  }

  async run(signal: AbortSignal): Promise<TermEnd> {
    const { clock, store, log } = this.#components
    const claim = await store.claim()
    this.#sequence = claim.sequence
    this.#state = claim.state
    let dueAtMs = clock.monotonicMs()
    let failures = 0
    let intervalMs: number = PACES.steady.intervalMs
    while (!signal.aborted) {
      try {
        const ended = await this.#round((pace) => {
          intervalMs = pace
        })
        if (ended) return ended
        failures = 0
      } catch (error) {
        if (signal.aborted) break
        failures += 1
        log.error({ overlayId: this.#overlayId, failures, err: error }, 'a round failed')
        if (failures >= FAILURES_MOST) return 'failing'
      }
      // By the clock, not by the end of the round: rounds do not drift. Those that were missed are left out.
      const late = Math.max(0, clock.monotonicMs() - dueAtMs)
      dueAtMs += intervalMs * (1 + Math.floor(late / intervalMs))
      await this.#waitUntil(dueAtMs, signal)
    }
    return 'stopped'
  }

  /** Someone has been shut out or let in: the orders that say so go out at once. The next round stays when it is due. */
  hasten(): void {
    this.#hasty = true
    this.#wake()
  }

  async #waitUntil(dueAtMs: number, signal: AbortSignal): Promise<void> {
    const { clock, log } = this.#components
    const wake = () => this.#wake()
    signal.addEventListener('abort', wake, { once: true })
    for (let isDue = false; !isDue && !signal.aborted; ) {
      if (this.#hasty) {
        this.#hasty = false
        await this.#reissue().catch((error: unknown) =>
          log.error({ overlayId: this.#overlayId, err: error }, 'orders could not be sent at once'),
        )
      }
      const woken = new AbortController()
      this.#wake = () => woken.abort()
      if (signal.aborted || this.#hasty) woken.abort()
      isDue = await sleep(clock, dueAtMs - clock.monotonicMs(), woken.signal)
    }
    signal.removeEventListener('abort', wake)
  }

  /** The orders in force under a new number, with whom nobody keeps a link to now. Evaluates nothing. */
  async #reissue(): Promise<void> {
    const { clock, store } = this.#components
    const last = this.#last
    const loaded = last && (await store.load())
    if (!last || !loaded) return
    const sequence = this.#sequence + 1
    // Ages count from this issue on; what is to begin later still begins at the same moment.
    const passedMs = clock.monotonicMs() - this.#issuedMs
    const { rounds } = last.orders
    const orders = {
      ...last.orders,
      ...later(last.orders, passedMs),
      ...(rounds && { rounds: laterRounds(rounds, passedMs) }),
      colonies: last.orders.colonies.map((colony) => ({
        ...colony,
        ...(colony.own && { own: { ...colony.own, ...later(colony.own, passedMs) } }),
      })),
      sequence,
      shut: loaded.shut,
      weights: loaded.weights,
    }
    const round = {
      ...last,
      sequence,
      orders,
      key: loaded.key,
      reading: null,
      events: [],
      rehearsals: [],
      leftOut: [],
    }
    // Where another has taken over the next round finds out.
    if (!(await store.write(round))) return
    this.#sequence = sequence
    this.#last = round
    this.#issuedMs = clock.monotonicMs()
  }

  async #round(onInterval: (intervalMs: number) => void): Promise<TermEnd | null> {
    const { clock, store, usual, upkeep, moments, planned, exact, log } = this.#components
    const startedMs = clock.monotonicMs()
    const loaded = await store.load(this.#state ? openRounds(this.#state.control, Infinity) : [])
    if (!loaded || loaded.snapshot.agents.length === 0) return 'nothing-joined'
    onInterval(PACES[loaded.pace].intervalMs)
    const { atMs } = loaded.snapshot
    const usualIs = usualNow(usual.at(atMs), this.#state?.memory ?? BLANK_MEMORY, atMs)
    const { round, reading } = this.#plan(loaded, usualIs)
    // In haste the next round is due sooner than the pace says.
    onInterval(round.orders.pace.intervalMs)
    if (!(await store.write(round))) return 'replaced'
    this.#sequence = round.sequence
    this.#state = round.state
    this.#before = withRound(loaded.snapshot, round.state.control)
    this.#last = round
    this.#issuedMs = clock.monotonicMs()
    const tookMs = clock.monotonicMs() - startedMs
    this.rounds.count += 1
    this.rounds.totalMs += tookMs
    this.rounds.longestMs = Math.max(this.rounds.longestMs, tookMs)
    // What can wait must not cost the overlay its orders.
    await upkeep
      .look(loaded, round.state.memory)
      .catch((error: unknown) => log.error({ overlayId: this.#overlayId, err: error }, 'upkeep failed'))
    await moments
      .look(withoutLeftOut(loaded, round.leftOut), round.state.memory, reading)
      .catch((error: unknown) =>
        log.error({ overlayId: this.#overlayId, err: error }, 'the moment could not be kept'),
      )
    await planned
      .look(loaded, reading)
      .catch((error: unknown) =>
        log.error({ overlayId: this.#overlayId, err: error }, 'planned links could not be followed'),
      )
    // Not waited for: a thread of its own works it out, and a later reading says it.
    void exact
      .look(withoutLeftOut(loaded, round.leftOut), reading)
      .catch((error: unknown) =>
        log.warn({ overlayId: this.#overlayId, err: error }, 'the exact figure could not be worked out'),
      )
    return null
  }

  #plan(loaded: Loaded, usual: number | null): { round: Round; reading: KeptReading } {
    const { pace: paceName, disclosure, weights, key } = loaded
    const pace = PACES[paceName]
    const sequence = this.#sequence + 1
    const { atMs } = loaded.snapshot
    const before = this.#state?.control ?? initialControl(atMs, pace)
    const audited = auditNow(disclosure, {
      now: loaded.snapshot,
      control: before,
      pace,
      memory: this.#audit,
      leftOutBefore: loaded.leftOutNames.length,
    })
    this.#audit = audited.memory
    const { snapshot, shut, leftOutNames } = withoutLeftOut(loaded, audited.leftOut)
    const planned = planRehearsals(
      loaded.rehearsals,
      { disclosure, agents: snapshot.agents, links: linksFor(loaded, pace) },
      atMs,
    )
    const { control, orders, estimate, core, parts, rehearsals } = evaluateAny({
      control: before,
      before: this.#before,
      now: snapshot,
      settings: { ...DEFAULT_SETTINGS, pace, disclosure },
      sequence,
      random: this.#components.random,
      rehearsals: planned.rehearsed,
      vectors: disclosure === 'named' ? null : (loaded.vectors ?? []),
    })
    const { reading, memory, events, facts, store } = judge({
      estimate,
      core,
      parts,
      isNamed: disclosure === 'named',
      agents: snapshot.agents.map((agent) => toJudged(agent, snapshot.atMs, pace.intervalMs)),
      memory: this.#state?.memory ?? BLANK_MEMORY,
      combination: orders.sweep?.id ?? null,
      meanWeightedDegree: estimate.coverage.meanWeightedDegree,
      usual,
      intervalMs: pace.intervalMs,
      leftOut: leftOutNames,
    })
    const names = new Map(snapshot.agents.map(({ agentId, name }) => [agentId, name]))
    const links =
      disclosure === 'named'
        ? this.#links.watch(snapshot, (agentId) => names.get(agentId) ?? agentId, pace.intervalMs)
        : []
    const withoutAgent = control.rounds?.last?.head.withoutAgent
    const told: KeptReading = {
      ...withFleetFacts(
        { ...reading, exact: this.#components.exact.latest(atMs) },
        fleetFacts({ snapshot, leftOut: leftOutNames.length, withoutAgent }, pace.intervalMs),
      ),
      ...(loaded.isShared && { facts }),
    }
    const round: Round = {
      sequence,
      state: { version: STATE_VERSION, control, memory },
      orders: { ...orders, weights, shut },
      key,
      reading: store ? told : null,
      events: [...events, ...links],
      rehearsals: tellRehearsals(planned, rehearsals, {
        atMs,
        reading,
        memory,
        floors: loaded.floors,
        meanWeightedDegree: estimate.coverage.meanWeightedDegree,
        agents: snapshot.agents.map(({ agentId, name, labels, teamId, last }) => ({
          ...{ agentId, name, labels, teamId },
          value: last?.report.node.value?.value ?? null,
        })),
        intervalMs: pace.intervalMs,
        isNamed: disclosure === 'named',
      }),
      leftOut: audited.leftOut,
    }
    return { round, reading: told }
  }
}

const later = ({ next }: Walk, passedMs: number): Pick<Walk, 'next'> =>
  next ? { next: { ...next, fromAgeMs: Math.max(0, next.fromAgeMs - passedMs) } } : {}

/** Rounds announced anew are still at the same moments; those that are past agents know of. */
function laterRounds(rounds: NonNullable<Orders['rounds']>, passedMs: number): Orders['rounds'] {
  return rounds.flatMap((round) =>
    round.fromAgeMs > passedMs ? [{ ...round, fromAgeMs: round.fromAgeMs - passedMs }] : [],
  )
}

/** Where links are not named nothing in reports can be audited from here: neighbours alone do. */
function auditNow(disclosure: Disclosure, input: AuditInput): ReturnType<typeof auditAgents> {
  return disclosure === 'named' ? auditAgents(input) : { leftOut: [], memory: BLANK_AUDIT }
}

/** The overlay as it is once these agents are left out: they have not joined, and nobody keeps a link to them. */
function withoutLeftOut(loaded: Loaded, leftOut: Round['leftOut']): Loaded {
  if (leftOut.length === 0) return loaded
  const { snapshot, shut, leftOutNames } = loaded
  const because = new Map(leftOut.map((out) => [out.agentId, out.because]))
  const gone = snapshot.agents.filter(({ agentId }) => because.has(agentId))
  return {
    ...loaded,
    snapshot: { ...snapshot, agents: snapshot.agents.filter(({ agentId }) => !because.has(agentId)) },
    shut: [...leftOut.map(({ agentId }) => ({ agentId, reason: 'left-out' as const })), ...shut].slice(
      0,
      MAX_SHUT,
    ),
    leftOutNames: [
      ...gone.map(({ agentId, name }) => ({ name, because: because.get(agentId) ?? '' })),
      ...leftOutNames,
    ],
  }
}

function toJudged(agent: LoadedAgent, atMs: number, intervalMs: number): JudgedAgent {
  const { agentId, name, labels, joinedAtMs, last } = agent
  return {
    agentId,
    name,
    labels,
    joinedAtMs,
    heard: isHeard(agent, atMs, intervalMs),
    heardAtMs: last?.receivedAtMs ?? null,
    attached: last?.report.sums.attached === 1,
    value: last?.report.node.value ?? null,
  }
}
