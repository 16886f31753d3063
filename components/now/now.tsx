'use client'

import { useOverlay, useReading } from '@/components/live/hooks'
import { TrendSheet } from '@/components/trend/trend-sheet'
import { Note } from '@/components/ui'
import { Cautions } from './cautions'
import { Coverage } from './coverage'
import { CrossingSheet } from './crossing-sheet'
import { NowHead } from './head'
import { IncidentLines } from './incident-line'
import { LastHourSheet } from './last-hour-sheet'
import { MonthReports } from './month-reports'
import { RehearsalLine } from './rehearsal-line'
import { StretchSheet } from './stretch-sheet'

/** The first page of an overlay. What has nothing to show before the first agent is left out until then. */
export function Now({ slug }: { slug: string }) {
  const overlay = useOverlay(slug)
  const reading = useReading(slug)
  const begun = !overlay.data || overlay.data.joined > 0 || (reading.data?.coverage.joined ?? 0) > 0
  return (
    <div className="space-y-5">
      <IncidentLines slug={slug} />
      <NowHead slug={slug} />
      <Coverage slug={slug} />
      <RehearsalLine slug={slug} />
      {overlay.data?.demo ? (
        <Note>
          {overlay.data.name} is an invented overlay: its agents are real and run on this machine, its story
          repeats.
        </Note>
      ) : null}
      {begun ? (
        <>
          <StretchSheet slug={slug} />
          <TrendSheet slug={slug} />
          <div className="grid gap-5 lg:items-start lg:grid-cols-[minmax(0,3fr)_minmax(0,2fr)]">
            <CrossingSheet slug={slug} />
            <LastHourSheet slug={slug} />
          </div>
          <MonthReports slug={slug} />
        </>
      ) : null}
      <Cautions />
    </div>
  )
}
