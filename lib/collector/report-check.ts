import type { ColonyCounters, ColonySums, Report } from '@/lib/method/report'

/** What is remembered of an agent's last report, to judge the next by. */
export interface HeldReport {
  incarnation: string
  previousIncarnation: string | null
  number: number
  colonies: readonly ColonySums[]
}

export type ReportVerdict =
  | { kind: 'new' }
  /** A retry or a straggler: what is held is as new or newer. */
  | { kind: 'repeated' }
  /** Counters only grow within an incarnation and seeding. */
  | { kind: 'falling'; colony: number; counter: string; from: number; to: number }

export function judgeReport(held: HeldReport | null, report: Report): ReportVerdict {
  if (!held) return { kind: 'new' }
  if (report.incarnation === held.previousIncarnation) return { kind: 'repeated' }
  if (held.incarnation !== report.incarnation) return { kind: 'new' }
  if (report.number <= held.number) return { kind: 'repeated' }
  for (const next of report.sums.colonies) {
    const before = held.colonies.find(({ colony }) => colony === next.colony)
    if (!before) continue
    const fall = fallOf(before, next)
    if (fall) return { kind: 'falling', colony: next.colony, ...fall }
  }
  return { kind: 'new' }
}

export function heldOf(before: HeldReport | null, { incarnation, number, sums }: Report): HeldReport {
  const previousIncarnation =
    before?.incarnation === incarnation ? before.previousIncarnation : (before?.incarnation ?? null)
  return { incarnation, previousIncarnation, number, colonies: sums.colonies }
}

type Fall = { counter: string; from: number; to: number }

function fallOf(before: ColonySums, next: ColonySums): Fall | null {
  if (next.seeding > before.seeding) return null
  if (next.seeding < before.seeding) return { counter: 'seeding', from: before.seeding, to: next.seeding }
  for (const counter of Object.keys(before.counters) as (keyof ColonyCounters)[]) {
    const from = before.counters[counter]
    const to = next.counters[counter]
    if (to < from) return { counter, from, to }
  }
  return null
}
