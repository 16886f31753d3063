'use client'

import { useState } from 'react'
import { Freshness } from '@/components/live/freshness'
import { useOverlay, useWeakPlace } from '@/components/live/hooks'
import { Cautions } from '@/components/now/cautions'
import { DisclosureFold } from '@/components/overlays/disclosure-fold'
import { useRange } from '@/components/story/use-range'
import { FailedState, Waiting } from '@/components/ui'
import { CrossingTable } from './crossing-table'
import { CutFigures } from './cut-figures'
import { FollowsSheet } from './follows-sheet'
import { WeakHead } from './head'
import { MomentSheet } from './moment-sheet'
import { StretchLarge } from './stretch-large'

/** Where the overlay is weakest, now or at a moment that is kept. */
export function WeakPlaceView({ slug }: { slug: string }) {
  const range = useRange()
  const [at, setAt] = useState<string | null>(null)
  const weak = useWeakPlace(slug, range, at)
  const overlay = useOverlay(slug)
  const place = weak.data

  return (
    <div className="space-y-5">
      {place ? null : <h1 className="sr-only">Weak place</h1>}
      <Freshness of={weak} />
      {place ? (
        <WeakHead slug={slug} place={place} onNow={() => setAt(null)} role={overlay.data?.role ?? 'viewer'} />
      ) : weak.error ? (
        <FailedState
          title={at === null ? 'The weak place could not be loaded.' : 'That moment could not be loaded.'}
          onRetry={at === null ? weak.retry : () => setAt(null)}
        >
          {weak.error.message}
        </FailedState>
      ) : (
        <Waiting label="Loading the weak place" className="h-44" />
      )}
      {place?.withheld?.because === 'nothing-joined' ? null : (
        <>
          <StretchLarge slug={slug} at={at} place={place ?? null} />
          <MomentSheet slug={slug} range={range} at={at} onAt={setAt} />
          {place?.sides ? (
            <>
              <CrossingTable slug={slug} place={place} range={range} />
              <div className="grid gap-5 lg:grid-cols-2 lg:items-start">
                <FollowsSheet slug={slug} place={place} />
                <CutFigures place={place} />
              </div>
            </>
          ) : null}
        </>
      )}
      {overlay.data ? <DisclosureFold disclosure={overlay.data.disclosure} /> : null}
      <Cautions />
    </div>
  )
}
