'use client'

import { useNow } from '@/components/ui/use-now'
import { formatRelative } from '@/lib/face/time'
import type { Live } from './hooks'

/**
 * Says that what is shown is old, while asking again. Nothing while all is well, or while another part of the page
 * (`unless`) says it already.
 */
export function Freshness({ of, unless }: { of: Live<unknown>; unless?: Live<unknown> }) {
  const now = useNow()
  if (!of.error || of.data === undefined || now === null || unless?.error) return null
  const age = of.updatedAtMs === null ? 'unknown' : formatRelative(of.updatedAtMs, now)
  return (
    <p role="status" className="mb-4 border-2 border-ink bg-sheet px-4 py-2 font-medium">
      Last update {age}
      {of.error.retry ? ', retrying.' : '.'} {of.error.message}
    </p>
  )
}
