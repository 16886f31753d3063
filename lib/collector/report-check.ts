import type { ColonyCounters, ColonySums, Report } from '@/lib/method/report'

/** What is remembered of an agent's last report, to judge the next by. */
export interface HeldReport {
  incarnation: string
  /** Incarnations before, newest first. */
  former: readonly string[]
  number: number
  colonies: readonly ColonySums[]
}

/** So many former incarnations are known again: as many programs with one key are told from restarts. */
export const FORMER_MOST = 16
/**
 * So many reports of former incarnations, each newer than the last, are no stragglers: an agent sends one report after
 * the other, so that of a start that has ended one can still arrive, or two.
 */
export const CLONE_REPORTS = 5

export type ReportVerdict =
  | { kind: 'new' }
  /** A retry: what is held is as new or newer. */
  | { kind: 'repeated' }
  /** Of a start before the present one: a straggler, or a second program with the same key. */
  | { kind: 'late' }
  /** Counters only grow within an incarnation and seeding. */
  | { kind: 'falling'; colony: number; counter: string; from: number; to: number }

export function judgeReport(held: HeldReport | null, report: Report): ReportVerdict {
  if (!held) return { kind: 'new' }
  if (held.former.includes(report.incarnation)) return { kind: 'late' }
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
  const former = before?.former ?? []
  const isSame = !before || before.incarnation === incarnation
  return {
    incarnation,
    former: isSame ? former : [before.incarnation, ...former].slice(0, FORMER_MOST),
    number,
    colonies: sums.colonies,
  }
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
