import type { EntityManager } from '@/lib/db'
import { query } from './query'
import type { KeptReading } from './reading'
import { columnsOf } from './reading-columns'

/** One row of the series. */
export async function insertReading(
  em: EntityManager,
  overlayId: string,
  reading: KeptReading,
): Promise<void> {
  const {
    at,
    lambda2,
    low,
    high,
    core,
    crossCheck,
    usual,
    level,
    trend,
    data,
    verdict,
    detail,
    demo,
    ...rest
  } = reading
  const { headline, whole } = columnsOf({ core, lambda2, low, high })
  const body = { ...rest, whole }
  await query(
    em,
    `insert into readings (overlay_id, at, lambda2, low, high, cross_check, usual, level, trend, data, verdict,
       detail, body, demo) values (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?::jsonb, ?)`,
    [
      overlayId,
      at,
      headline.lambda2,
      headline.low,
      headline.high,
      crossCheck,
      usual,
      level,
      trend,
      data,
      verdict,
      detail,
      JSON.stringify(body),
      demo,
    ],
  )
}
