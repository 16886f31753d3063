import type { Incident } from '@/lib/data/warn-dto'
import { formatCount, formatReading, formatShare } from '@/lib/face/format'
import { INCIDENT_STATE_WORDS } from '@/lib/face/incidents'
import { formatDuration } from '@/lib/face/time'
import { CAUTION } from './incident-report'
import type { Report, TableColumn } from './parts'
import { stamp } from './times'

export interface MonthDay {
  /** "2026-11-20", in UTC. */
  day: string
  /** Of which something is kept. */
  hours: number
  /** Fresh readings. */
  fresh: number
  /** Of fresh readings; null where there was none. */
  mean: number | null
  least: number | null
  most: number | null
  /** The fewest that held the sides together; null where no cut stood out. */
  crossingLinks: number | null
  /** The least share of joined agents that was heard. */
  coverage: number | null
}

export interface MonthReportInput {
  overlay: { name: string; team: string }
  month: string
  fromMs: number
  toMs: number
  days: readonly MonthDay[]
  /** By the gravest level of each hour; null where there was none. */
  hoursAtLevel: readonly { level: string | null; hours: number }[]
  incidents: readonly Incident[]
  madeAt: Date
}

const HOUR_MS = 3_600_000

export function monthReport(input: MonthReportInput): Report {
  const { overlay, month, days, incidents, madeAt } = input
  const name = monthName(input.fromMs)
  return {
    title: `${overlay.name} in ${name}`,
    madeAt,
    parts: [
      {
        is: 'title',
        above: `${overlay.name} · ${overlay.team} · ${month}, in UTC`,
        text: monthSentence(input, name),
      },
      { is: 'block', rows: levelRows(input) },
      { is: 'heading', text: 'Incidents' },
      {
        is: 'table',
        columns: INCIDENTS,
        rows: incidents.map((one) => [
          String(one.number),
          stamp(Date.parse(one.raisedAt), 'UTC'),
          one.clearedAt
            ? formatDuration((Date.parse(one.clearedAt) - Date.parse(one.raisedAt)) / 1000)
            : 'not cleared',
          `${one.sentence} (${one.severity})`,
          one.holder?.name ?? (one.state === 'open' ? INCIDENT_STATE_WORDS.open : 'nobody'),
        ]),
        empty: 'No incident was raised in this month or lasted into it.',
      },
      { is: 'heading', text: 'Readings by day' },
      {
        is: 'table',
        columns: DAYS,
        rows: days.map(dayRow),
        empty: 'Nothing is kept of this month: no agent was heard, or the hours have not been summed up yet.',
      },
      {
        is: 'note',
        text: 'A day’s mean is that of its fresh readings. Levels count each hour by the gravest in it, so that a short weakness counts as a whole hour. Crossing links are the fewest seen, coverage is the least share of joined agents that was heard.',
      },
      { is: 'note', text: CAUTION },
    ],
  }
}

function monthName(fromMs: number): string {
  return new Intl.DateTimeFormat('en-GB', { month: 'long', year: 'numeric', timeZone: 'UTC' }).format(fromMs)
}

export function monthSentence({ hoursAtLevel, incidents, days }: MonthReportInput, name: string): string {
  const known = hoursAtLevel.reduce((sum, { level, hours }) => sum + (level === null ? 0 : hours), 0)
  const told = incidents.length === 0 ? 'no incident' : formatCount(incidents.length, 'incident')
  if (days.length === 0 || known === 0) return `${name}: nothing was read; ${told}.`
  const firm = hoursAtLevel.find(({ level }) => level === 'firm')?.hours ?? 0
  return `${name}: firm in ${formatShare(firm / known)} of ${formatCount(known, 'hour')} read; ${told}.`
}

function levelRows({ hoursAtLevel, days, fromMs, toMs, madeAt }: MonthReportInput): [string, string][] {
  const hours = Math.floor((Math.min(toMs, Math.max(fromMs, madeAt.getTime())) - fromMs) / HOUR_MS)
  const kept = days.reduce((sum, day) => sum + day.hours, 0)
  return [
    ...hoursAtLevel.map(({ level, hours: at }): [string, string] => [
      level === null ? 'No level' : `Level ${level}`,
      formatCount(at, 'hour'),
    ]),
    ['Not heard of', formatCount(Math.max(0, hours - kept), 'hour')],
  ]
}

const INCIDENTS: readonly TableColumn[] = [
  { header: 'no.', share: 0.08, figures: true },
  { header: 'raised (UTC)', share: 0.21, figures: true },
  { header: 'lasted', share: 0.13 },
  { header: 'what', share: 0.4 },
  { header: 'who had it', share: 0.18 },
]
const DAYS: readonly TableColumn[] = [
  { header: 'day', share: 0.17, figures: true },
  { header: 'hours', share: 0.1, figures: true },
  { header: 'mean', share: 0.13, figures: true },
  { header: 'least', share: 0.13, figures: true },
  { header: 'most', share: 0.13, figures: true },
  { header: 'crossing links', share: 0.19, figures: true },
  { header: 'coverage', share: 0.15, figures: true },
]

function dayRow({ day, hours, mean, least, most, crossingLinks, coverage }: MonthDay): string[] {
  const figure = (value: number | null) => (value === null ? '–' : formatReading(value))
  return [
    day,
    String(hours),
    figure(mean),
    figure(least),
    figure(most),
    crossingLinks === null ? '–' : String(crossingLinks),
    // Rounded down: never better than it was.
    coverage === null ? '–' : `${Math.floor(coverage * 100)} %`,
  ]
}
