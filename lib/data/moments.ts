import { z } from 'zod'
import type { MomentNode } from '@/lib/collector/moment'
import { type MomentRow, momentRowSchema, unpackNodes } from '@/lib/collector/moment-pack'
import { epochMs, query } from '@/lib/collector/query'
import type { VerdictFacts } from '@/lib/collector/verdict'
import { type OverlayLink, type Reading, readingSchema } from '@/lib/data/dto'
import type { EntityManager } from '@/lib/db'
import { AppError } from '@/lib/http/app-error'
import { sightedReading } from './reading-sight'
import type { Sight } from './sight'

export const momentQuerySchema = z.object({
  /** As it was then; left out: as it is. */
  at: z.iso.datetime({ offset: true }).optional(),
})
export type MomentQuery = z.infer<typeof momentQuerySchema>

const MINUTE_MS = 60_000
/** The latest that is no older than this tells of a moment: of snapshots a minute apart, and of those an hour apart. */
const SOURCES = [
  { table: 'node_snapshots', oldestMs: 5 * MINUTE_MS },
  { table: 'node_snapshot_hours', oldestMs: 65 * MINUTE_MS },
] as const

export interface PastMoment {
  at: string
  nodes: readonly (MomentNode & { number: number; partner: boolean })[]
  links: readonly OverlayLink[]
  reading: Reading
}

/** For those who have checked the caller. */
export async function loadMoment(
  em: EntityManager,
  overlayId: string,
  at: Date,
  sight: Sight,
): Promise<PastMoment> {
  const { reading: kept, ...row } = await findSnapshot(em, overlayId, at)
  const faces = await query<FaceThen>(
    em,
    `select number, agent_id as "agentId", name, labels from snapshot_nodes
     where overlay_id = ? and number <@ ?::int4multirange`,
    [overlayId, row.nodes],
  )
  const known = new Map(faces.map((face) => [face.number, faceSeen(face, sight)]))
  const { facts, ...reading } = kept
  const nodes = unpackNodes(row).flatMap((node) => {
    const face = known.get(node.number)
    return face ? [{ ...face, ...node }] : []
  })
  return {
    at: new Date(row.atMs).toISOString(),
    nodes,
    links: linksOf(row, known),
    reading: sightedReading(reading, facts, sight),
  }
}

interface FaceThen {
  number: number
  agentId: string
  name: string
  labels: Record<string, string>
}

function faceSeen(face: FaceThen, sight: Sight): FaceThen & { partner: boolean } {
  const partner = !sight.isOwn(face.agentId)
  return { ...face, name: sight.nameOf(face), labels: sight.labelsOf(face), partner }
}

const factsSchema = z.custom<VerdictFacts>((value) => typeof value === 'object' && value !== null)
const snapshotSchema = momentRowSchema.extend({
  reading: readingSchema.extend({ facts: factsSchema.optional() }),
})

async function findSnapshot(
  em: EntityManager,
  overlayId: string,
  at: Date,
): Promise<z.infer<typeof snapshotSchema>> {
  for (const { table, oldestMs } of SOURCES) {
    const [row] = await query(
      em,
      `select ${epochMs('at')} as "atMs", nodes::text, to_jsonb("values") as values,
         to_jsonb(weighted_degrees) as "weightedDegrees", to_jsonb(degrees) as degrees, sides, states, links, reading
       from ${table} where overlay_id = ? and at <= ? and at > ? order by at desc limit 1`,
      [overlayId, at, new Date(at.getTime() - oldestMs)],
    )
    if (row) return snapshotSchema.parse(row)
  }
  throw nothingKept()
}

export function nothingKept(): AppError {
  return new AppError(
    'not-found',
    'Nothing is kept of that moment: nobody evaluated the overlay then, or it is too long ago. Choose another.',
  )
}

function linksOf({ atMs, links }: MomentRow, known: ReadonlyMap<number, { name: string }>): OverlayLink[] {
  return links.flatMap(([one, other, weight, share, lost]) => {
    const names = [known.get(one)?.name, known.get(other)?.name].filter((name) => name !== undefined).sort()
    const [a, b] = names
    if (a === undefined || b === undefined) return []
    const state = lost === 1 ? ('lost' as const) : ('live' as const)
    return { a, b, weight, share, crossing: true, state, heardAt: new Date(atMs).toISOString() }
  })
}
