import { query } from '@/lib/collector/query'
import type { EntityManager } from '@/lib/db'
import { rollUpAgain } from '@/lib/jobs'
import type { History } from './history'

const ROWS_PER_INSERT = 1000

export async function hasReadings(em: EntityManager, overlayId: string): Promise<boolean> {
  const rows = await query(em, 'select 1 from readings where overlay_id = ? limit 1', [overlayId])
  return rows.length > 0
}

/** Whole or not at all. Readings and events are marked as demo. */
export async function storeHistory(em: EntityManager, overlayId: string, history: History): Promise<void> {
  await em.transactional(async (tx) => {
    for (const readings of chunks(history.readings)) {
      const rows = readings.map((reading) => {
        const {
          at,
          lambda2,
          low,
          high,
          crossCheck,
          usual,
          level,
          trend,
          data,
          verdict,
          detail,
          demo,
          ...body
        } = reading
        const columns = { at, lambda2, low, high, usual, level, trend, data, verdict, detail, demo, body }
        return { ...columns, cross_check: crossCheck }
      })
      await query(
        tx,
        `insert into readings (overlay_id, at, lambda2, low, high, cross_check, usual, level, trend, data, verdict,
           detail, body, demo)
         select ?::uuid, at, lambda2, low, high, cross_check, usual, level, trend, data, verdict, detail, body, demo
         from jsonb_to_recordset(?::jsonb) as row(at timestamptz, lambda2 float8, low float8, high float8,
           cross_check float8, usual float8, level text, trend text, data text, verdict text, detail text,
           body jsonb, demo boolean)`,
        [overlayId, JSON.stringify(rows)],
      )
    }
    await query(
      tx,
      `insert into overlay_events (overlay_id, at, kind, text, data)
       select ?::uuid, at, kind, text, '{"demo": true}'::jsonb
       from jsonb_to_recordset(?::jsonb) as row(at timestamptz, kind text, text text) order by at`,
      [overlayId, JSON.stringify(history.events)],
    )
  })
  const times = history.readings.map(({ at }) => Date.parse(at))
  if (times.length > 0)
    // Minutes and hours may have got past that time already.
    await rollUpAgain(em, { fromMs: Math.min(...times), toMs: Math.max(...times) + 1 }, overlayId)
}

function chunks<T>(rows: readonly T[]): T[][] {
  const count = Math.ceil(rows.length / ROWS_PER_INSERT)
  return Array.from({ length: count }, (_, at) =>
    rows.slice(at * ROWS_PER_INSERT, (at + 1) * ROWS_PER_INSERT),
  )
}
