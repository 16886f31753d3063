import { FIGURES, type Figure, type TakenReport } from './taken-report'

/** What is remembered of an agent's last report, to judge the next by. */
export interface HeldReport {
  incarnation: string
  /** Incarnations before, newest first. */
  former: readonly string[]
  number: number
  /** As in `TakenReport`. */
  figures: readonly number[]
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

export function judgeReport(held: HeldReport | null, report: TakenReport): ReportVerdict {
  if (!held) return { kind: 'new' }
  if (held.former.includes(report.incarnation)) return { kind: 'late' }
  if (held.incarnation !== report.incarnation) return { kind: 'new' }
  if (report.number <= held.number) return { kind: 'repeated' }
  const fall = fallOf(held.figures, report.figures)
  return fall ? { kind: 'falling', ...fall } : { kind: 'new' }
}

export function heldOf(before: HeldReport | null, { incarnation, number, figures }: TakenReport): HeldReport {
  const former = before?.former ?? []
  const isSame = !before || before.incarnation === incarnation
  return {
    incarnation,
    former: isSame ? former : [before.incarnation, ...former].slice(0, FORMER_MOST),
    number,
    figures,
  }
}

type Fall = { colony: number; counter: Figure; from: number; to: number }
const SLOT = FIGURES.indexOf('colony')
const SEEDING = FIGURES.indexOf('seeding')

/** The first counter that fell, of colonies that are still what they were. */
function fallOf(before: readonly number[], next: readonly number[]): Fall | null {
  for (let at = 0; at < next.length; at += FIGURES.length) {
    const was = placeOf(next[at + SLOT], before)
    if (was === null || figure(next, at + SEEDING) > figure(before, was + SEEDING)) continue
    for (let place = SEEDING; place < FIGURES.length; place++) {
      const [from, to] = [figure(before, was + place), figure(next, at + place)]
      const counter = FIGURES[place]
      if (to < from && counter) return { colony: figure(next, at + SLOT), counter, from, to }
    }
  }
  return null
}

const figure = (figures: readonly number[], place: number): number => figures[place] ?? 0

/** Where a colony's figures begin. */
function placeOf(colony: number | undefined, figures: readonly number[]): number | null {
  for (let at = 0; at < figures.length; at += FIGURES.length) if (figures[at + SLOT] === colony) return at
  return null
}
