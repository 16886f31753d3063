'use client'

import { useNow } from '@/components/ui'
import { monthReportUrl } from '@/lib/face/urls'

/** This month so far, and the one before it. */
export function MonthReports({ slug }: { slug: string }) {
  const now = useNow()
  if (now === null) return null
  const date = new Date(now)
  const months = [0, -1].map(
    (back) => new Date(Date.UTC(date.getUTCFullYear(), date.getUTCMonth() + back, 1)),
  )
  return (
    <p className="flex flex-wrap items-baseline gap-x-4 text-soft">
      Report of the month as PDF:
      {months.map((month) => (
        <a
          key={month.getTime()}
          href={monthReportUrl(slug, month.toISOString().slice(0, 7))}
          download
          className="inline-flex min-h-11 items-center text-ink underline underline-offset-4 sm:min-h-8"
        >
          {month.toLocaleDateString('en-GB', { month: 'long', year: 'numeric', timeZone: 'UTC' })}
        </a>
      ))}
    </p>
  )
}
