import { AVERAGING_INTERVALS } from '@/lib/method/node'
import { PACES } from '@/lib/method/pace'
import { mean, median, type RunResult } from './course'

export interface Rounds {
  power: number
  krylov: number
}

/** Medians over the seeds of one case; what is counted is added up. */
export interface Summary {
  lambda2: number
  lambda3: number | null
  rounds: Rounds
  isTwoClusters: boolean
  cold: number
  loss: number | null
  changeOfCut: number | null
  bias: number
  spread: number
  crossCheckBias: number
  held: number
  halfWidth: number
  off: number
}

export function summaryOf(
  init: Pick<Summary, 'lambda2' | 'lambda3' | 'rounds' | 'isTwoClusters'> & { results: readonly RunResult[] },
): Summary {
  const { results, ...rest } = init
  const of = (pick: (result: RunResult) => number): number => median(results.map(pick))
  const total = (pick: (result: RunResult) => number): number => results.length * mean(results.map(pick))
  const whereAny = (pick: (result: RunResult) => number | null): number | null => {
    const values = results.flatMap((result) => pick(result) ?? [])
    return values.length === 0 ? null : median(values)
  }
  return {
    ...rest,
    cold: of(({ coldSeconds }) => coldSeconds),
    loss: whereAny(({ lossSeconds }) => lossSeconds),
    changeOfCut: whereAny(({ changeOfCutSeconds }) => changeOfCutSeconds),
    bias: of(({ bias }) => bias),
    spread: of(({ spread }) => spread),
    crossCheckBias: of(({ crossCheckBias }) => crossCheckBias),
    held: total(({ held }) => held) / total(({ fresh }) => fresh),
    halfWidth: median(results.flatMap(({ halfWidths }) => halfWidths)),
    off: total(({ freshOff }) => freshOff) / total(({ freshInAll }) => freshInAll),
  }
}

export interface Target {
  what: string
  name: string
  /** Seconds. */
  value: number
  limit: number
}

export const LOSS_LIMIT_SECONDS = 15
export const CHANGE_OF_CUT_LIMIT_SECONDS = 30
/** One round of a synchronous method takes at least a tick. */
const ROUND_SECONDS = PACES.steady.tickMs / 1000
const INTERVAL_SECONDS = PACES.steady.intervalMs / 1000
/** Six report intervals and the averaging time. */
const LEAST_COLD_SECONDS = (6 + AVERAGING_INTERVALS) * INTERVAL_SECONDS

/** What is promised at steady pace, beside what was measured. */
export function targetsOf(
  name: string,
  { rounds, cold, loss, changeOfCut, isTwoClusters }: Summary,
): Target[] {
  const limit = Math.max(1.5 * rounds.power * ROUND_SECONDS, LEAST_COLD_SECONDS)
  const targets: Target[] = [{ what: 'from cold', name, value: cold, limit }]
  if (isTwoClusters && loss !== null)
    targets.push({ what: 'loss of a crossing link', name, value: loss, limit: LOSS_LIMIT_SECONDS })
  if (changeOfCut !== null)
    targets.push({
      what: 'change of the weakest cut',
      name,
      value: changeOfCut,
      limit: CHANGE_OF_CUT_LIMIT_SECONDS,
    })
  return targets
}
