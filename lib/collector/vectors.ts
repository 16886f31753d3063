import type { EntityManager } from '@/lib/db'
import type { HeldVector } from '@/lib/method/control'
import { prepared, query, type Statement } from './query'

export interface VectorRow extends HeldVector {
  overlayId: string
}

const STORE: Statement = {
  name: 'ingest-vectors',
  text: `insert into masked_vectors (overlay_id, round, agent_id, sums)
    select * from unnest($1::uuid[], $2::bigint[], $3::uuid[], $4::text[])
    on conflict do nothing`,
}

/** The first of an agent for a round stays: two of them would be two moments under one mask, whose difference is in clear. */
export async function storeVectors(em: EntityManager, rows: readonly VectorRow[]): Promise<void> {
  if (rows.length === 0) return
  const key = ({ overlayId, round, agentId }: VectorRow) => `${overlayId} ${agentId} ${round}`
  const ordered = [...rows].sort((a, b) => (key(a) < key(b) ? -1 : 1))
  await prepared(em, STORE, [
    ordered.map(({ overlayId }) => overlayId),
    ordered.map(({ round }) => round),
    ordered.map(({ agentId }) => agentId),
    ordered.map(({ sums }) => sums),
  ])
}

/** Of these rounds, from agents that are of the overlay. */
export async function loadVectors(
  em: EntityManager,
  overlayId: string,
  rounds: readonly number[],
): Promise<HeldVector[]> {
  if (rounds.length === 0) return []
  const rows = await query<{ agentId: string; round: string | number; sums: string }>(
    em,
    `select agent_id as "agentId", round, sums from masked_vectors
     where overlay_id = ? and round in (${rounds.map(() => '?').join(', ')})`,
    [overlayId, ...rounds],
  )
  return rows.map((row) => ({ ...row, round: Number(row.round) }))
}

/** Rounds before this one are closed, or will never be. */
export async function dropVectors(em: EntityManager, overlayId: string, before: number): Promise<void> {
  await query(em, 'delete from masked_vectors where overlay_id = ? and round < ?::bigint returning 1', [
    overlayId,
    before,
  ])
}
