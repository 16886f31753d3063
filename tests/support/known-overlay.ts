import { BLANK_MEMORY, type Memory, STATE_VERSION } from '@/lib/collector/memory'
import type { Reading } from '@/lib/data/dto'
import { sql } from '@/lib/db'
import type { Disclosure } from '@/lib/method/orders'
import type { NodeFacts } from '@/lib/method/report'
import type { OverlayPerTest } from './overlay-per-test'
import { someReport } from './reports'

export interface SeededNode {
  name: string
  labels?: Record<string, string>
  value?: number | null
  /** Names of the nodes it names as linked; all others are sealed. */
  links?: readonly string[]
  degree?: number
}

const SWEEP = 5

/** Agents with reports just received, and what a leader would have said of them. */
export async function seedKnown(
  seeded: OverlayPerTest,
  disclosure: Disclosure,
  nodes: readonly SeededNode[],
  reading: Partial<Reading> & Pick<Reading, 'lambda2'>,
  memory: Partial<Memory> = {},
): Promise<Map<string, string>> {
  const { em, overlay } = seeded
  await sql(em(), 'update overlays set disclosure = ? where id = ?', [disclosure, overlay.id])
  const ids = new Map<string, string>()
  for (const { name, labels = {} } of nodes) {
    const [row] = await sql<{ id: string }>(
      em(),
      `insert into agents (overlay_id, name, public_key, labels, version, joined_at)
       values (?, ?, ?, ?::jsonb, '0.1.0', now()) returning id`,
      [overlay.id, name, `${overlay.id}-${name}`, JSON.stringify(labels)],
    )
    ids.set(name, row!.id)
  }
  for (const { name, value = null, links = [], degree } of nodes) {
    const report = someReport(1)
    const facts: NodeFacts = {
      ...report.node,
      degree: degree ?? links.length,
      weightedDegree: degree ?? links.length,
      value: value === null ? null : { sweep: SWEEP, value },
      links: links.map((peer) => ({ peer: ids.get(peer)!, weight: 1, share: null })),
    }
    await sql(
      em(),
      `insert into agent_states (agent_id, overlay_id, incarnation, report_number, orders_sequence, sums, node, complaints, received_at)
       values (?, ?, 'i', 1, 1, ?::json, ?::json, '[]', clock_timestamp())`,
      [ids.get(name)!, overlay.id, JSON.stringify(report.sums), JSON.stringify(facts)],
    )
  }
  const state = {
    version: STATE_VERSION,
    control: {},
    memory: { ...BLANK_MEMORY, signSince: SWEEP, ...memory },
  }
  await sql(
    em(),
    `insert into controls (overlay_id, holder, sequence, state, updated_at) values (?, 'one', 1, ?::jsonb, clock_timestamp())`,
    [overlay.id, JSON.stringify(state)],
  )
  await seedReading(seeded, nodes.length, reading)
  return ids
}

export async function seedReading(
  { em, overlay }: OverlayPerTest,
  joined: number,
  { lambda2, level = 'firm', data = 'fresh', ...over }: Partial<Reading> & Pick<Reading, 'lambda2'>,
): Promise<void> {
  const body = {
    ...{
      confidence: 0.9,
      core: null,
      lambda3AtMost: null,
      treatAsSplit: false,
      singleCut: true,
      sides: null,
    },
    ...{ crossingLinks: null, crossingWeight: null, looseEnds: [], seedings: [], last: null },
    coverage: { linksKnown: 0, linksMeasured: 0, joined, heard: joined, unheard: 0 },
    ...over,
  }
  await sql(
    em(),
    `insert into readings (overlay_id, at, lambda2, low, high, level, data, verdict, detail, body)
     values (?, clock_timestamp(), ?, ?, ?, ?, ?, 'Firm.', '', ?::jsonb)`,
    [overlay.id, lambda2, lambda2, lambda2, level, data, JSON.stringify(body)],
  )
}
