import type { Reading } from '@/lib/data/dto'
import type { SEEN_BY } from '@/lib/data/reinforcement-dto'
import type { EntityManager } from '@/lib/db'
import { isHeard } from '@/lib/method/control'
import { PACES } from '@/lib/method/pace'
import type { Loaded } from './leader-load'
import { MINUTE_MS } from './moments'
import { epochMs, query } from './query'

/** A reading tells of a link once it has been there for so long. */
export const SETTLED_MS = 2 * MINUTE_MS

export interface PlanRow {
  id: string
  a: string
  b: string
  degreeA: number | null
  degreeB: number | null
  joinedAtMs: number | null
}

export interface PlanFacts {
  atMs: number
  /** The headline where the reading is fresh, else null. */
  fresh: number | null
  /** Null where links are not named. */
  linked: boolean | null
  degreeA: number | null
  degreeB: number | null
}

export interface PlanChange {
  joined?: { atMs: number; by: (typeof SEEN_BY)[number] }
  before?: { atMs: number; lambda2: number }
  after?: { atMs: number; lambda2: number }
}

/** What becomes of a planned link by what is known now: seen or not, and the reading beside it. */
export function followPlan(row: PlanRow, facts: PlanFacts): PlanChange | null {
  const { atMs, fresh, linked } = facts
  const risen = more(row.degreeA, facts.degreeA) && more(row.degreeB, facts.degreeB)
  if (row.joinedAtMs === null) {
    if (linked ?? risen) return { joined: { atMs, by: linked === null ? 'degrees' : 'named' } }
    return fresh === null ? null : { before: { atMs, lambda2: fresh } }
  }
  if (fresh === null || linked === false || atMs - row.joinedAtMs < SETTLED_MS) return null
  return { after: { atMs, lambda2: fresh } }
}

function more(then: number | null, now: number | null): boolean {
  return then !== null && now !== null && now > then
}

/** Follows an overlay's planned links, once a minute, for whoever leads it. */
export class PlannedLinks {
  readonly #forkEm: () => Promise<EntityManager>
  readonly #init: { overlayId: string; holder: string }
  #minute: number | null = null

  constructor(components: { forkEm(): Promise<EntityManager> }, init: { overlayId: string; holder: string }) {
    this.#forkEm = components.forkEm
    this.#init = init
  }

  async look(loaded: Loaded, reading: Reading): Promise<void> {
    const { atMs } = loaded.snapshot
    const minute = Math.floor(atMs / MINUTE_MS)
    if (minute === this.#minute) return
    this.#minute = minute
    const em = await this.#forkEm()
    const rows = await query<PlanRow>(
      em,
      `select id, a, b, degree_a as "degreeA", degree_b as "degreeB", ${epochMs('joined_at')} as "joinedAtMs"
       from reinforcements where overlay_id = ? and withdrawn_at is null and after_at is null`,
      [this.#init.overlayId],
    )
    const factsOf = factsFrom(loaded, reading)
    for (const row of rows) {
      const change = followPlan(row, factsOf(row))
      if (change) await this.#keep(em, row.id, change)
    }
  }

  /** Nothing where another leads by now. */
  async #keep(em: EntityManager, id: string, { joined, before, after }: PlanChange): Promise<void> {
    const date = (atMs: number | undefined) => (atMs === undefined ? null : new Date(atMs))
    await query(
      em,
      `update reinforcements set
         joined_at = coalesce(joined_at, ?), seen_by = coalesce(seen_by, ?),
         before_at = coalesce(?, before_at), before_lambda2 = coalesce(?, before_lambda2),
         after_at = ?, after_lambda2 = ?
       where id = ? and exists (select from controls where overlay_id = ? and holder = ?)`,
      [
        ...[date(joined?.atMs), joined?.by ?? null, date(before?.atMs), before?.lambda2 ?? null],
        ...[date(after?.atMs), after?.lambda2 ?? null],
        ...[id, this.#init.overlayId, this.#init.holder],
      ],
    )
  }
}

function factsFrom({ snapshot, pace, disclosure }: Loaded, reading: Reading): (row: PlanRow) => PlanFacts {
  const { intervalMs } = PACES[pace]
  const heard = snapshot.agents.flatMap((agent) =>
    isHeard(agent, snapshot.atMs, intervalMs) ? [[agent.name, agent] as const] : [],
  )
  const byName = new Map(heard)
  const fresh = reading.data === 'fresh' ? (reading.core?.lambda2 ?? reading.lambda2) : null
  return ({ a, b }) => {
    const [one, other] = [byName.get(a), byName.get(b)]
    const names = (from: typeof one, to: typeof one) =>
      from?.last.report.node.links.some(({ peer }) => peer === to?.agentId) ?? false
    return {
      atMs: snapshot.atMs,
      fresh,
      linked: disclosure === 'named' ? names(one, other) || names(other, one) : null,
      degreeA: one?.last.report.node.degree ?? null,
      degreeB: other?.last.report.node.degree ?? null,
    }
  }
}
