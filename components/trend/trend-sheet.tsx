'use client'

import { useSearchParams } from 'next/navigation'
import { useState } from 'react'
import { Freshness } from '@/components/live/freshness'
import { useEvents, useHistory, useReading } from '@/components/live/hooks'
import { EmptyState, FailedState, Sheet, Waiting } from '@/components/ui'
import { cx } from '@/lib/face/cx'
import { DEFAULT_RANGE, fittingRange, RANGES, type Range, rangeNamed } from '@/lib/face/range'
import { Trend } from './trend'

export const RANGE_PARAMETER = 'last'

/** In the address, so that it can be passed on and outlives a reload; no step back for each choice. */
export function pickRange(range: Range): void {
  const url = new URL(location.href)
  url.searchParams.set(RANGE_PARAMETER, range.id)
  history.replaceState(null, '', url)
}

/** The trend of one overlay with its choice of range. */
export function TrendSheet({ slug }: { slug: string }) {
  const picked = rangeNamed(useSearchParams().get(RANGE_PARAMETER))
  const [fitting, setFitting] = useState<Range | null>(null)
  const range = picked ?? fitting ?? DEFAULT_RANGE
  const past = useHistory(slug, range)
  if (fitting === null && past.data?.points[0]) {
    // Chosen once: a drawing that changes its scale by itself cannot be read.
    setFitting(fittingRange(Date.parse(past.data.points[0].at), past.data.toMs))
  }
  const events = useEvents(slug)
  const reading = useReading(slug)

  return (
    <Sheet heading="Trend" aside={<RangeChoice range={range} onRange={pickRange} />}>
      <Freshness of={past} unless={reading} />
      {past.data ? (
        past.data.points.length > 0 ? (
          <Trend
            {...past.data}
            rangeLabel={range.label}
            events={events.data ?? []}
            usual={reading.data?.usual ?? null}
          />
        ) : (
          <div className="min-h-64">
            <EmptyState title={`No readings in the last ${range.label}.`}>
              The line begins with the first reading. Choose a longer range to look further back.
            </EmptyState>
          </div>
        )
      ) : past.error ? (
        <div className="min-h-64">
          <FailedState quiet title="The trend could not be loaded." onRetry={past.retry}>
            {past.error.message}
          </FailedState>
        </div>
      ) : (
        <TrendWaiting />
      )}
    </Sheet>
  )
}

function TrendWaiting() {
  return <Waiting label="Loading the trend" className="h-64" />
}

export function RangeChoice({ range, onRange }: { range: Range; onRange: (range: Range) => void }) {
  return (
    <fieldset className="flex flex-wrap items-center gap-x-1">
      <legend className="sr-only">Show the last</legend>
      <span aria-hidden="true" className="mr-1">
        last
      </span>
      {RANGES.map((r) => (
        <button
          key={r.id}
          type="button"
          aria-pressed={r.id === range.id}
          onClick={() => onRange(r)}
          className={cx(
            'min-h-9 px-2.5',
            r.id === range.id ? 'bg-ink text-paper' : 'text-ink underline decoration-edge underline-offset-4',
          )}
        >
          {r.label}
        </button>
      ))}
    </fieldset>
  )
}
