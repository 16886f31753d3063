import { query } from '@/lib/collector/query'
import type { EntityManager } from '@/lib/db'

/** A sign of life, for whoever watches the watcher. */
export async function pulse(
  em: EntityManager,
  what: 'evaluating' | 'sending' | 'heartbeat',
  now: Date,
): Promise<void> {
  await query(
    em,
    `insert into watch_pulses (what, at) values (?, ?)
     on conflict (what) do update set at = greatest(watch_pulses.at, excluded.at)`,
    [what, now],
  )
}
