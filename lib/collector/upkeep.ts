import type { EntityManager } from '@/lib/db'
import { isHeard } from '@/lib/method/control'
import { PACES } from '@/lib/method/pace'
import type { Clock } from './clock'
import { enterEvent } from './events-store'
import { dropKeys, keyStep, takeOver } from './key-turn'
import type { Loaded } from './leader-load'
import type { Memory } from './memory'
import { query } from './query'
import { RETIRE_LOOK_MS, toRetire } from './retire'
import { eventOf, nodesList } from './said'
import { countOf } from './words'

const HOUR_MS = 3_600_000

export interface UpkeepComponents {
  forkEm(): Promise<EntityManager>
  clock: Clock
}

/** What a leader does for its overlay beside the rounds: turns the signing key, retires agents long unheard. */
export class Upkeep {
  readonly #components: UpkeepComponents
  readonly #overlayId: string
  readonly #holder: string
  #retiredAtMs: number | null = null

  constructor(components: UpkeepComponents, init: { overlayId: string; holder: string }) {
    this.#components = components
    this.#overlayId = init.overlayId
    this.#holder = init.holder
  }

  async look(loaded: Loaded, memory: Memory): Promise<void> {
    await this.#turnKey(loaded)
    await this.#retire(loaded, memory)
  }

  async #turnKey({ snapshot, pace, keysInTurn }: Loaded): Promise<void> {
    const { intervalMs } = PACES[pace]
    const heard = snapshot.agents
      .filter((agent) => isHeard(agent, snapshot.atMs, intervalMs))
      .map(({ last }) => ({ keyRing: last?.report.node.health?.keyRing ?? null }))
    const step = keyStep(keysInTurn, heard, snapshot.atMs)
    if (step === null) return
    await this.#asLeader((em) => (step === 'take-over' ? takeOver : dropKeys)(em, this.#overlayId))
  }

  async #retire({ snapshot, pace, retireAfterHours }: Loaded, memory: Memory): Promise<void> {
    const nowMs = this.#components.clock.monotonicMs()
    if (retireAfterHours === null) return
    if (this.#retiredAtMs !== null && nowMs - this.#retiredAtMs < RETIRE_LOOK_MS) return
    this.#retiredAtMs = nowMs
    const { atMs, agents } = snapshot
    const { intervalMs } = PACES[pace]
    const limitMs = retireAfterHours * HOUR_MS
    const ids = toRetire({
      agents: agents.map((agent) => ({
        agentId: agent.agentId,
        joinedAtMs: agent.joinedAtMs,
        heard: isHeard(agent, atMs, intervalMs),
        heardAtMs: agent.last?.receivedAtMs ?? null,
      })),
      limitMs,
      atMs,
      listeningSinceMs: memory.listeningSinceMs,
      treatAsSplit: memory.treatAsSplit,
      intervalMs,
    })
    if (ids.length === 0) return
    await this.#asLeader(async (em) => {
      const retired = await retireUnheard(em, ids, new Date(atMs - limitMs))
      if (retired.length === 0) return
      const why = ` retired: unheard for ${countOf(retireAfterHours, 'hour')}`
      await enterEvent(em, this.#overlayId, eventOf('agent-left', [...nodesList(retired.sort()), why]))
    })
  }

  /** Nothing at all where another leads by now. */
  async #asLeader(run: (em: EntityManager) => Promise<void>): Promise<void> {
    const em = await this.#components.forkEm()
    await em.transactional(async (tx) => {
      const [mine] = await query(
        tx,
        'select 1 from controls where overlay_id = ? and holder = ? for update',
        [this.#overlayId, this.#holder],
      )
      if (mine) await run(tx)
    })
  }
}

/** Unless it has been heard since. @returns names */
async function retireUnheard(em: EntityManager, ids: readonly string[], cutoff: Date): Promise<string[]> {
  const list = ids.map(() => '?').join(', ')
  const rows = await query<{ id: string; name: string }>(
    em,
    `update agents a set state = 'left', ended_at = clock_timestamp()
     where id in (${list}) and state = 'joined'
       and not exists (select from agent_states s where s.agent_id = a.id and s.received_at >= ?)
     returning id, name`,
    [...ids, cutoff],
  )
  if (rows.length > 0)
    await query(
      em,
      `delete from agent_sessions where agent_id in (${rows.map(() => '?').join(', ')})`,
      rows.map(({ id }) => id),
    )
  return rows.map(({ name }) => name)
}
