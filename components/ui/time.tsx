'use client'

import { formatExact, formatMoment, formatRelative } from '@/lib/face/time'
import { useNow } from './use-now'

export interface TimeProps {
  /** ISO 8601. */
  at: string
  /** "age": 3 min ago. "moment": 11:46. "both": 11:46, 3 min ago. */
  show?: 'age' | 'moment' | 'both'
}

export function Time({ at, show = 'age' }: TimeProps) {
  const now = useNow()
  const atMs = Date.parse(at)
  if (now === null) {
    // The server does not know the reader's zone.
    return <time dateTime={at}>{`${formatMoment(atMs, atMs, { timeZone: 'UTC' })} UTC`}</time>
  }
  const age = formatRelative(atMs, now)
  const moment = formatMoment(atMs, now)
  const text = { age, moment, both: `${moment}, ${age}` }[show]
  return (
    <time dateTime={at} title={formatExact(atMs)} suppressHydrationWarning>
      {text}
    </time>
  )
}
