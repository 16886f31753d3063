import type { Reading } from '@/lib/data/dto'

type Value = Pick<Reading, 'lambda2' | 'low' | 'high'>

/** The columns of a reading hold its headline, so that series, usual and trend are of one thing: the core where there is one. */
export function columnsOf({ core, lambda2, low, high }: Value & Pick<Reading, 'core'>): {
  headline: Value
  whole: Value | null
} {
  const all = { lambda2, low, high }
  return core ? { headline: core, whole: all } : { headline: all, whole: null }
}

/** @param whole missing in rows from before cores were told apart */
export function fromColumns(headline: Value, whole: Value | null | undefined): Value & Pick<Reading, 'core'> {
  const { lambda2, low, high } = headline
  if (!whole || lambda2 === null) return { ...headline, core: null }
  return { ...whole, core: { lambda2, low: low ?? lambda2, high: high ?? lambda2 } }
}
