import type { Log } from '@/lib/http/runtime'
import { DEFAULT_SETTINGS, evaluate, initialControl, isHeard, type Snapshot } from '@/lib/method/control'
import { PACES } from '@/lib/method/pace'
import type { Random } from '@/lib/method/random'
import { type Clock, sleep } from './clock'
import { type JudgedAgent, judge } from './judge'
import type { LeaderStore, Loaded, LoadedAgent, Round } from './leader-store'
import { LinkWatch } from './link-watch'
import { BLANK_MEMORY, STATE_VERSION, type StoredState } from './memory'
import type { Usual } from './usual'

/** A round that fails is tried anew at the next interval; after so many in a row the overlay is given up. */
export const FAILURES_MOST = 5

export interface TermComponents {
  store: Pick<LeaderStore, 'claim' | 'load' | 'write'>
  usual: Pick<Usual, 'at'>
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
      await sleep(clock, dueAtMs - clock.monotonicMs(), signal)
    }
    return 'stopped'
  }

  async #round(onInterval: (intervalMs: number) => void): Promise<TermEnd | null> {
    const { clock, store, usual } = this.#components
    const startedMs = clock.monotonicMs()
    const loaded = await store.load()
    if (!loaded || loaded.snapshot.agents.length === 0) return 'nothing-joined'
    onInterval(PACES[loaded.pace].intervalMs)
    const known = usual.at(loaded.snapshot.atMs)
    const round = this.#plan(loaded, known === undefined ? (this.#state?.memory.usual ?? null) : known)
    if (!(await store.write(round))) return 'replaced'
    this.#sequence = round.sequence
    this.#state = round.state
    this.#before = loaded.snapshot
    const tookMs = clock.monotonicMs() - startedMs
    this.rounds.count += 1
    this.rounds.totalMs += tookMs
    this.rounds.longestMs = Math.max(this.rounds.longestMs, tookMs)
    return null
  }

  #plan({ pace: paceName, disclosure, snapshot }: Loaded, usual: number | null): Round {
    const pace = PACES[paceName]
    const sequence = this.#sequence + 1
    const { control, orders, estimate } = evaluate({
      control: this.#state?.control ?? initialControl(snapshot.atMs, pace),
      before: this.#before,
      now: snapshot,
      settings: { ...DEFAULT_SETTINGS, pace, disclosure },
      sequence,
      random: this.#components.random,
    })
    const { reading, memory, events, store } = judge({
      estimate,
      agents: snapshot.agents.map((agent) => toJudged(agent, snapshot.atMs, pace.intervalMs)),
      memory: this.#state?.memory ?? BLANK_MEMORY,
      combination: control.combination?.id ?? null,
      meanWeightedDegree: estimate.coverage.meanWeightedDegree,
      usual,
      intervalMs: pace.intervalMs,
    })
    const names = new Map(snapshot.agents.map(({ agentId, name }) => [agentId, name]))
    const links =
      disclosure === 'named'
        ? this.#links.watch(snapshot, (agentId) => names.get(agentId) ?? agentId, pace.intervalMs)
        : []
    return {
      sequence,
      state: { version: STATE_VERSION, control, memory },
      orders,
      reading: store ? reading : null,
      events: [...events, ...links],
    }
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
