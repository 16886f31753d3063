import type { EntityManager } from '@/lib/db'
import type { Floor } from '@/lib/warn/rule'
import { enterEvent } from '../events-store'
import { query } from '../query'
import { enterEnd } from './end-store'
import type { RehearsalChange, TeamFloor } from './open'

export async function loadFloors(em: EntityManager, overlayId: string): Promise<TeamFloor[]> {
  const rows = await query<{ teamId: string; floor: Floor }>(
    em,
    `select team_id as "teamId", settings->'floor' as floor from warning_rules
     where overlay_id = ? and is_on and settings->>'kind' = 'floor'`,
    [overlayId],
  )
  return rows
}

/** In the round's transaction. What was cancelled meanwhile stays so. */
export async function writeChanges(
  em: EntityManager,
  overlayId: string,
  changes: readonly RehearsalChange[],
  at: Date,
): Promise<void> {
  for (const change of changes) {
    const { id, incidentId, state, progress, expectedAtMs, startedAtMs, taken, remain, says } = change
    const isOver = state === 'done' || state === 'failed'
    const written = await query<{ teamId: string }>(
      em,
      `update rehearsals set state = ?, progress = ?, expected_at = ?::timestamptz, started_at = ?::timestamptz,
         ended_at = ?::timestamptz, taken = ?, remain = ?, result = ?::jsonb, verdict = ?, plan = ?::jsonb
       where id = ? and state in ('waiting', 'running') returning team_id as "teamId"`,
      [
        state,
        progress,
        timeOf(expectedAtMs),
        timeOf(startedAtMs),
        isOver ? at : null,
        taken,
        remain,
        change.result && JSON.stringify(change.result),
        change.verdict,
        change.plan && JSON.stringify(change.plan),
        id,
      ],
    )
    if (written.length === 0 || !says) continue
    const { teamId } = written[0]!
    if (says.kind === 'rehearsal-started') await enterEvent(em, overlayId, { ...says, teamId })
    else await enterEnd(em, { overlayId, teamId, incidentId, at, text: says.text, userId: null })
  }
}

const timeOf = (atMs: number | null): Date | null => (atMs === null ? null : new Date(atMs))
