import type { ColonyCounters, Report } from '@/lib/method/report'
import type { Statement } from '@/lib/method/statement'
import type { Incoming } from './ingest-entry'

const COUNTERS = [
  'seeded',
  'births',
  'kills',
  'culls',
  'dropped',
  'sent',
  'received',
  'walkerTime',
  'occupancyX',
  'occupancyY',
  'linkTime',
] as const satisfies readonly (keyof ColonyCounters)[]

/** The place of each figure of a colony in `TakenReport.figures`; what only grows within a seeding comes last. */
export const FIGURES = ['colony', 'mean', 'seeding', ...COUNTERS] as const
export type Figure = (typeof FIGURES)[number]

/**
 * A report while it is taken in: texts as they are stored, and the few things that are looked at, in the place of the hundred
 * and more objects that it came as, so that those need not be kept until its answer.
 */
export interface TakenReport {
  incarnation: string
  number: number
  ordersSequence: number
  /** Colony after colony, each as FIGURES has it. */
  figures: readonly number[]
  sums: string
  node: string
  complaints: string
  /** The node's text names links. */
  namesLinks: boolean
  version: string
  keyRing: number | undefined
}

/** A request with its report taken. */
export interface TakenRequest extends Omit<Incoming, keyof Report> {
  report: TakenReport
}

export function takeRequest({ protocol, wantsReceipt, relayed, away, ...report }: Incoming): TakenRequest {
  return { protocol, wantsReceipt, relayed, away, report: takeReport(report) }
}

export function takeReport({
  incarnation,
  number,
  ordersSequence,
  sums,
  node,
  complaints,
}: Report): TakenReport {
  return {
    incarnation,
    number,
    ordersSequence,
    figures: figuresOf(sums.colonies),
    sums: JSON.stringify(sums),
    node: JSON.stringify(node),
    complaints: JSON.stringify(complaints ?? []),
    namesLinks: node.links.length > 0,
    version: node.version,
    keyRing: node.health?.keyRing,
  }
}

export function figuresOf(colonies: Report['sums']['colonies']): number[] {
  const figures: number[] = []
  for (const { colony, mean, seeding, counters } of colonies) {
    figures.push(colony, mean, seeding)
    for (const counter of COUNTERS) figures.push(counters[counter])
  }
  return figures
}

/** As `statementOf` has it of a report. */
export function takenStatement(agentId: string, { incarnation, number, figures }: TakenReport): Statement {
  const at = (from: number, figure: Figure) => figures[from + FIGURES.indexOf(figure)] ?? 0
  const colonies = Array.from({ length: figures.length / FIGURES.length }, (_, index) => {
    const from = index * FIGURES.length
    return {
      colony: at(from, 'colony'),
      seeding: at(from, 'seeding'),
      mean: at(from, 'mean'),
      births: at(from, 'births'),
      culls: at(from, 'culls'),
      walkerTime: at(from, 'walkerTime'),
      linkTime: at(from, 'linkTime'),
    }
  })
  return { agentId, incarnation, reportNumber: number, colonies }
}
