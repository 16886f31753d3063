'use client'

import { Freshness } from '@/components/live/freshness'
import { useEvents, useHistory, useKeptMoments, useReading } from '@/components/live/hooks'
import { Trend } from '@/components/trend/trend'
import { pickRange, RangeChoice } from '@/components/trend/trend-sheet'
import { Button, EmptyState, FailedState, Sheet, Waiting } from '@/components/ui'
import type { KeptMoment } from '@/lib/data/weak-dto'
import { formatCount, formatReading } from '@/lib/face/format'
import { nearestMoment } from '@/lib/face/moments'
import type { Range } from '@/lib/face/range'
import { formatMoment } from '@/lib/face/time'

export interface MomentSheetProps {
  slug: string
  range: Range
  /** The moment shown; null for now. */
  at: string | null
  onAt: (at: string | null) => void
}

/** The trend, and beside it which moment is looked at. */
export function MomentSheet({ slug, range, at, onAt }: MomentSheetProps) {
  const past = useHistory(slug, range)
  const moments = useKeptMoments(slug, range)
  const events = useEvents(slug)
  const reading = useReading(slug)
  const items = moments.data ?? []
  return (
    <Sheet heading="Trend and moment" aside={<RangeChoice range={range} onRange={pickRange} />}>
      <Freshness of={past} />
      {past.data ? (
        past.data.points.length > 0 ? (
          <Trend
            {...past.data}
            rangeLabel={range.label}
            events={events.data ?? []}
            usual={reading.data?.usual ?? null}
            markMs={at === null ? null : Date.parse(at)}
            onPick={items.length > 0 ? (atMs) => onAt(nearestMoment(items, atMs)) : undefined}
          />
        ) : (
          <EmptyState title={`No readings in the last ${range.label}.`}>
            Choose a longer range to look further back.
          </EmptyState>
        )
      ) : past.error ? (
        <FailedState quiet title="The trend could not be loaded." onRetry={past.retry}>
          {past.error.message}
        </FailedState>
      ) : (
        <Waiting label="Loading the trend" className="h-64" />
      )}
      {moments.error && !moments.data ? (
        <FailedState quiet title="The moments that are kept could not be loaded." onRetry={moments.retry}>
          {moments.error.message}
        </FailedState>
      ) : (
        <MomentSlider items={items} at={at} onAt={onAt} />
      )}
    </Sheet>
  )
}

function MomentSlider(props: {
  items: readonly KeptMoment[]
  at: string | null
  onAt: (at: string | null) => void
}) {
  const { items, at, onAt } = props
  if (items.length === 0)
    return <p className="mt-2 text-sm text-soft">No moment of this range is kept yet: one is, each minute.</p>
  const found = items.findIndex((item) => item.at === at)
  const chosen = found < 0 ? items.length : found
  const words = at === null ? 'now' : momentWords(items[found] ?? null, at)
  return (
    <div className="mt-2 flex flex-wrap items-center gap-x-4 gap-y-1 border-t border-hairline pt-3 text-sm">
      <label className="flex min-w-56 flex-1 items-center gap-3 text-soft">
        moment
        <input
          type="range"
          min={0}
          max={items.length}
          value={chosen}
          onChange={(event) => onAt(items[Number(event.target.value)]?.at ?? null)}
          aria-label="Moment shown on this page"
          aria-valuetext={words}
          className="min-h-9 w-full accent-(--ink)"
        />
      </label>
      <p className="min-w-40 font-medium">{words}</p>
      <Button kind="quiet" className="text-sm" disabled={at === null} onClick={() => onAt(null)}>
        now
      </Button>
    </div>
  )
}

function momentWords(item: KeptMoment | null, at: string): string {
  const when = formatMoment(Date.parse(at), Date.now())
  if (!item) return when
  const reading = item.lambda2 === null ? 'withheld' : formatReading(item.lambda2)
  const links = item.crossingLinks === null ? '' : `, ${formatCount(item.crossingLinks, 'crossing link')}`
  return `${when}: ${reading}${links}`
}
