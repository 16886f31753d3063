import { pickRange, RangeChoice } from '@/components/trend/trend-sheet'
import { type Column, DataTable, EmptyState, Fold, Sheet } from '@/components/ui'
import { formatCount } from '@/lib/face/format'
import type { Range } from '@/lib/face/range'
import { stepMsOf } from '@/lib/face/story'
import { Course, type CourseProps } from './course'

export interface HistorySheetProps<Row extends { at: string }> {
  range: Range
  /** Where the courses end. */
  toMs: number
  /** The moments that are kept, oldest first. */
  rows: readonly Row[]
  courses: readonly Pick<CourseProps, 'heading' | 'points' | 'least' | 'most' | 'format'>[]
  table: { caption: string; columns: Column<Row>[]; csvName: string }
  /** Why there may be nothing, and what to do. */
  empty: { title: string; text: string }
}

/** What is kept of a node or a link: a drawing of each figure, and all of them as a table. */
export function HistorySheet<Row extends { at: string }>(props: HistorySheetProps<Row>) {
  const { range, toMs, rows, courses, table, empty } = props
  const times = { fromMs: toMs - range.seconds * 1000, toMs, stepMs: stepMsOf(range) }
  return (
    <Sheet heading="History" aside={<RangeChoice range={range} onRange={pickRange} />}>
      {rows.length === 0 ? (
        <EmptyState title={empty.title}>{empty.text}</EmptyState>
      ) : (
        <>
          <div className="grid gap-6 md:grid-cols-2">
            {courses.map((course) => (
              <Course key={course.heading} {...times} {...course} />
            ))}
          </div>
          <div className="mt-4">
            <Fold heading="As a table" about={formatCount(rows.length, 'moment')}>
              <DataTable
                {...table}
                rows={rows}
                rowKey={({ at }) => at}
                initialSort={{ id: 'at', descending: true }}
                empty={null}
              />
            </Fold>
          </div>
        </>
      )}
    </Sheet>
  )
}
