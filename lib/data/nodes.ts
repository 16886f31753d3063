import { z } from 'zod'
import type { AgentStateName, Overlay } from '@/entities'
import type { Memory } from '@/lib/collector/memory'
import { epochMs, query } from '@/lib/collector/query'
import { sideOf } from '@/lib/collector/sides'
import type { OverlayNode } from '@/lib/data/dto'
import type { EntityManager } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import type { Call } from '@/lib/http/call'
import { heldMs } from '@/lib/method/control'
import { PACES } from '@/lib/method/pace'
import type { NodeFacts, Sums } from '@/lib/method/report'
import { loadMoment, momentQuerySchema, type PastMoment } from './moments'
import { healthOf } from './node-health'
import { openOverlay } from './overlays'
import { pageSchema } from './paging'
import { memoryOf } from './readings'
import { type Sight, sightOf } from './sight'

export const nodesQuerySchema = pageSchema.extend({
  ...momentQuerySchema.shape,
  /** Only nodes with this label, as key=value. */
  label: z
    .string()
    .max(200)
    .regex(/^[^=]+=/, 'Write the label as key=value.')
    .optional(),
})
export type NodesQuery = z.output<typeof nodesQuerySchema>

interface Row {
  id: string
  name: string
  labels: Record<string, string>
  version: string
  state: AgentStateName
  nodeName: string | null
  joinedAtMs: number
  endedAtMs: number | null
  leftOutBecause: string | null
  facts: NodeFacts | null
  colonies: Sums['colonies'] | null
  relayed: boolean | null
  attached: boolean | null
  heardAtMs: number | null
  ageMs: number | null
}

const SELECT = `select a.id, a.name, a.labels, a.version, a.state, a.node as "nodeName",
    ${epochMs('a.joined_at')} as "joinedAtMs", ${epochMs('a.ended_at')} as "endedAtMs",
    a.left_out_because as "leftOutBecause", s.node::jsonb - 'links' as facts, s.sums->'colonies' as colonies, s.relayed,
    (s.sums->>'attached')::int = 1 as attached, ${epochMs('s.received_at')} as "heardAtMs",
    ${epochMs('clock_timestamp()')} - ${epochMs('s.received_at')} as "ageMs"
  from agents a left join agent_states s on s.agent_id = a.id`

interface Listed {
  id: string
  name: string
  labels: Record<string, string>
}

/** By the names the caller sees; of several that left under one name the last, and none where another has it now. */
export async function listNodes(
  call: Call,
  slug: string,
  { after, limit, label, at }: NodesQuery,
): Promise<{ items: OverlayNode[]; next: string | null; at?: string }> {
  const overlay = await openOverlay(call, 'node.list', slug)
  const sight = await sightOf(call, overlay)
  if (at !== undefined)
    return nodesThen(await loadMoment(call.em, overlay.id, new Date(at), sight), { after, limit, label })
  const memory = await memoryOf(call.em, overlay.id)
  const listed = await query<Listed>(
    call.em,
    `select a.id, a.name, a.labels from agents a where a.overlay_id = ?
       and not (a.state = 'left' and exists (select from agents b where b.overlay_id = a.overlay_id
         and b.name = a.name and b.id <> a.id and (b.state <> 'left' or b.joined_at > a.joined_at)))`,
    [overlay.id],
  )
  const page = pageOf(
    listed.map(({ id, name, labels }) => ({
      id,
      name: sight.nameOf({ agentId: id, name }),
      labels: sight.labelsOf({ agentId: id, labels }),
    })),
    { after, limit, label },
  )
  const { intervalMs } = PACES[overlay.pace]
  const rows = await query<Row>(call.em, `${SELECT} where a.id = any(?::uuid[])`, [
    `{${page.items.map(({ id }) => id).join(',')}}`,
  ])
  const byId = new Map(rows.map((row) => [row.id, row]))
  const items = page.items.flatMap(({ id }) => {
    const row = byId.get(id)
    return row ? [toNode(row, memory, intervalMs, sight)] : []
  })
  return { items, next: page.next }
}

/** Of all, those of one page, in the order of names. */
function pageOf<N extends { name: string; labels: Readonly<Record<string, string>> }>(
  nodes: readonly N[],
  { after = '', limit, label }: Omit<NodesQuery, 'at'>,
): { items: N[]; next: string | null } {
  const wanted = label === undefined ? null : labelOf(label)
  const found = nodes
    .filter(({ name, labels }) => name > after && (!wanted || labels[wanted[0]] === wanted[1]))
    .sort((one, other) => (one.name < other.name ? -1 : 1))
  const items = found.slice(0, limit)
  return { items, next: found.length > limit ? (items.at(-1)?.name ?? null) : null }
}

function labelOf(text: string): [key: string, value: string] {
  const equals = text.indexOf('=')
  return [text.slice(0, equals), text.slice(equals + 1)]
}

/** Of those that had joined then. How they fared is not kept. */
function nodesThen(
  { at, nodes }: PastMoment,
  page: Omit<NodesQuery, 'at'>,
): { items: OverlayNode[]; next: string | null; at: string } {
  const { items, next } = pageOf(nodes, page)
  return {
    items: items.map(({ name, labels, side, value, degree, weightedDegree, state, partner }) => ({
      ...{ name, labels: { ...labels }, side, value, degree, weightedDegree, state },
      heardAt: state === 'unheard' ? null : at,
      version: null,
      ...(partner && { partner }),
    })),
    next,
    at,
  }
}

/** For those who have checked the caller. */
export async function getNode(
  em: EntityManager,
  { id, pace }: Pick<Overlay, 'id' | 'pace'>,
  agentId: string,
  sight: Sight,
): Promise<OverlayNode> {
  const [row] = await query<Row>(em, `${SELECT} where a.id = ?`, [agentId])
  if (!row) throw new AppError('not-found', 'The node is gone. Load the list again.')
  return toNode(row, await memoryOf(em, id), PACES[pace].intervalMs, sight)
}

/**
 * By the name the caller sees: the one that has it now, else the last that had it. For those who have checked the
 * caller.
 */
export async function nodeNamed(
  em: EntityManager,
  { id, pace }: Pick<Overlay, 'id' | 'pace'>,
  memory: Memory | null,
  name: string,
  sight: Sight,
): Promise<OverlayNode | null> {
  const [where, which] = sight.isWhole ? ['a.name = ?', name] : ['a.id = ?', sight.agentNamed(name)]
  const [row] = await query<Row>(
    em,
    `${SELECT} where a.overlay_id = ? and ${where} order by (a.state <> 'left') desc, a.joined_at desc limit 1`,
    [id, which],
  )
  return row ? toNode(row, memory, PACES[pace].intervalMs, sight) : null
}

/** All that have joined, by the names that are seen. For those who have checked the caller. */
export async function joinedNodes(
  em: EntityManager,
  { id, pace }: Pick<Overlay, 'id' | 'pace'>,
  memory: Memory | null,
  sight: Sight,
): Promise<OverlayNode[]> {
  const rows = await query<Row>(em, `${SELECT} where a.overlay_id = ? and a.state = 'joined'`, [id])
  const nodes = rows.map((row) => toNode(row, memory, PACES[pace].intervalMs, sight))
  return nodes.sort((one, other) => (one.name < other.name ? -1 : 1))
}

function toNode(row: Row, memory: Memory | null, intervalMs: number, sight: Sight): OverlayNode {
  const { id, facts, version, colonies } = row
  const seen = {
    name: sight.nameOf({ agentId: id, name: row.name }),
    labels: sight.labelsOf({ agentId: id, labels: row.labels }),
    side: sideOf(memory, id),
    value: facts?.value?.value ?? null,
    degree: facts?.degree ?? null,
    weightedDegree: facts?.weightedDegree ?? null,
    heardAt: timeOf(row.heardAtMs),
    state: stateOf(row, intervalMs),
  }
  // How another team's agent fares is that team's own affair.
  if (!sight.isOwn(id)) return { ...seen, version: null, partner: true }
  return {
    ...seen,
    version: facts?.version ?? version,
    node: row.nodeName,
    joinedAt: new Date(row.joinedAtMs).toISOString(),
    endedAt: timeOf(row.endedAtMs),
    leftOutBecause: row.leftOutBecause,
    relayed: row.relayed === true,
    health: facts && colonies ? healthOf(facts, colonies) : null,
  }
}

function timeOf(atMs: number | null): string | null {
  return atMs === null ? null : new Date(atMs).toISOString()
}

function stateOf({ state, ageMs, attached }: Row, intervalMs: number): OverlayNode['state'] {
  if (state !== 'joined') return state
  if (ageMs === null || ageMs > heldMs(intervalMs)) return 'unheard'
  return attached ? 'heard' : 'detached'
}
