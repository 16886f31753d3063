import type { EntityManager } from '@/lib/db'
import type { Loaded } from './leader-load'
import type { Memory } from './memory'
import type { Moment } from './moment'
import { momentOf } from './moment'
import { packMoment } from './moment-pack'
import { type Bindable, query } from './query'
import type { KeptReading } from './reading'

export const MINUTE_MS = 60_000

/** Keeps a snapshot of the nodes each minute, for whoever leads the overlay. */
export class Moments {
  readonly #forkEm: () => Promise<EntityManager>
  readonly #init: { overlayId: string; holder: string }
  #minute: number | null = null

  constructor(components: { forkEm(): Promise<EntityManager> }, init: { overlayId: string; holder: string }) {
    this.#forkEm = components.forkEm
    this.#init = init
  }

  /** The first look in a minute keeps it. */
  async look(loaded: Loaded, memory: Memory, reading: KeptReading): Promise<void> {
    const minute = Math.floor(loaded.snapshot.atMs / MINUTE_MS)
    if (minute === this.#minute) return
    const em = await this.#forkEm()
    await em.transactional(async (tx) => {
      // Nothing where another leads by now; and one at a time, so that a minute is kept once.
      const [mine] = await query(
        tx,
        'select 1 from controls where overlay_id = ? and holder = ? for update',
        [this.#init.overlayId, this.#init.holder],
      )
      if (mine) await keepMoment(tx, this.#init.overlayId, momentOf(loaded, memory, reading))
    })
    this.#minute = minute
  }
}

/** Of each minute the first that comes. */
export async function keepMoment(em: EntityManager, overlayId: string, moment: Moment): Promise<void> {
  const numbers = await numberNodes(em, overlayId, moment)
  const { nodes, values, weightedDegrees, degrees, sides, states, links } = packMoment(moment, numbers)
  const fromMs = Math.floor(moment.atMs / MINUTE_MS) * MINUTE_MS
  await query(
    em,
    `insert into node_snapshots (overlay_id, at, nodes, "values", weighted_degrees, degrees, sides, states, links, reading)
     select ?::uuid, ?::timestamptz, ?::int4multirange, ?::real[], ?::real[], ?::integer[], ?, ?, ?::jsonb, ?::jsonb
     where not exists (select from node_snapshots where overlay_id = ? and at >= ? and at < ?)`,
    [
      ...[overlayId, new Date(moment.atMs), nodes, values, weightedDegrees, degrees, sides, states, links],
      JSON.stringify(moment.reading),
      ...[overlayId, new Date(fromMs), new Date(fromMs + MINUTE_MS)],
    ],
  )
}

interface Known {
  number: number
  agentId: string
  name: string
  labels: Record<string, string>
}

/** A node keeps its number as long as its name and labels are what they were. */
async function numberNodes(
  em: EntityManager,
  overlayId: string,
  { nodes }: Moment,
): Promise<Map<string, number>> {
  const known = await query<Known>(
    em,
    `select number, agent_id as "agentId", name, labels from snapshot_nodes where overlay_id = ? and current`,
    [overlayId],
  )
  const last = new Map(known.map((node) => [node.agentId, node]))
  const changed = nodes.filter(({ agentId, name, labels }) => {
    const was = last.get(agentId)
    return !was || was.name !== name || !sameLabels(was.labels, labels)
  })
  const numbers = new Map(known.map(({ agentId, number }) => [agentId, number]))
  if (changed.length === 0) return numbers
  const rows: Bindable[] = [
    JSON.stringify(changed.map(({ agentId, name, labels }) => ({ agentId, name, labels }))),
  ]
  await query(
    em,
    `update snapshot_nodes set current = false, until = clock_timestamp()
     where overlay_id = ? and current
       and agent_id in (select "agentId" from jsonb_to_recordset(?::jsonb) as node("agentId" uuid))`,
    [overlayId, ...rows],
  )
  const made = await query<{ number: number; agentId: string }>(
    em,
    `insert into snapshot_nodes (overlay_id, number, agent_id, name, labels)
     select ?::uuid, coalesce((select max(number) from snapshot_nodes where overlay_id = ?), 0)
       + row_number() over (order by name collate "C"), "agentId", name, labels
     from jsonb_to_recordset(?::jsonb) as node("agentId" uuid, name text, labels jsonb)
     returning number, agent_id as "agentId"`,
    [overlayId, overlayId, ...rows],
  )
  for (const { agentId, number } of made) numbers.set(agentId, number)
  return numbers
}

function sameLabels(a: Readonly<Record<string, string>>, b: Readonly<Record<string, string>>): boolean {
  const keys = Object.keys(a)
  return keys.length === Object.keys(b).length && keys.every((key) => a[key] === b[key])
}
