'use client'

import { useState } from 'react'
import { useNow } from '@/components/ui'
import type { RehearsalDto } from '@/lib/data/rehearsal-dto'
import { progressText } from '@/lib/face/rehearsal'

/** How far it has come; it never goes back, as an estimate may. */
export function Progress({ rehearsal, most = null }: { rehearsal: RehearsalDto; most?: number | null }) {
  const now = useNow()
  const [furthest, setFurthest] = useState(rehearsal.progress)
  if (rehearsal.progress > furthest) setFurthest(rehearsal.progress)
  const value = Math.min(1, Math.max(furthest, rehearsal.progress))
  return (
    <div className="max-w-2xl">
      <progress
        aria-label="Progress of the rehearsal"
        max={1}
        value={value}
        className="block h-3 w-full appearance-none border border-ink bg-sheet [&::-moz-progress-bar]:bg-ink [&::-webkit-progress-bar]:bg-sheet [&::-webkit-progress-value]:bg-ink"
      />
      <p className="mt-1 min-h-6 text-soft">{progressText(rehearsal, now, most)}</p>
    </div>
  )
}
