import { z } from 'zod'
import { autocorrelation } from '@/lib/warn/stats/autocorrelation'
import { median } from '@/lib/warn/stats/median'
import type { WalkerSample } from './walker-hours'

/** How readings differ from the exact λ₂. Samples are 30 s apart. */
export const noiseSchema = z.object({
  /** A reading is of so many samples ago. */
  lagSamples: z.number(),
  /** Of the logarithm of reading over exact, from one sample to the next. */
  phi: z.number(),
  spread: z.number(),
  /** Samples not fresh after a change of links. */
  settlingSamples: z.number(),
  /** Share of samples fresh where nothing has changed for a while. */
  freshAtRest: z.number(),
  /** What it was fitted to. */
  walkerHours: z.number(),
})
export type NoiseModel = z.infer<typeof noiseSchema>

const MOST_LAG = 6
/** A step of the exact value larger than this is a change of links, not load. */
const CHANGE_SHARE = 0.015
const REST_SAMPLES = 12

/** Fits the model to runs of walkers. */
export function fitNoise(runs: readonly (readonly WalkerSample[])[]): NoiseModel {
  const lags = Array.from({ length: MOST_LAG + 1 }, (_, lag) => lag)
  const spreads = lags.map((lag) => deviation(runs.flatMap((run) => ratios(run, lag))))
  const lagSamples = spreads.indexOf(Math.min(...spreads))
  const after = runs.flatMap((run) => samplesAfterChange(run))
  const atRest = after.filter(({ since }) => since > REST_SAMPLES)
  const moving = after.filter(({ since }) => since <= REST_SAMPLES)
  const freshAtRest = share(atRest)
  // As many wholly stale samples as make up what freshness is missing after a change.
  const settlingSamples = Math.max(0, Math.round(REST_SAMPLES * (1 - share(moving) / freshAtRest)))
  return {
    lagSamples,
    phi: median(runs.map((run) => autocorrelation(ratios(run, lagSamples), 1))),
    spread: spreads[lagSamples]!,
    settlingSamples,
    freshAtRest,
    walkerHours: runs.reduce((sum, run) => sum + (run[run.length - 1]?.minute ?? 0) / 60, 0),
  }
}

/** Logarithms of fresh readings over the exact value so many samples before. */
export function ratios(run: readonly WalkerSample[], lag: number): number[] {
  return run.flatMap(({ isFresh, lambda2 }, at) => {
    const exact = run[at - lag]?.exact
    return isFresh && lambda2 !== null && lambda2 > 0 && exact && exact > 0 ? [Math.log(lambda2 / exact)] : []
  })
}

export function deviation(values: readonly number[]): number {
  return Math.sqrt(values.reduce((sum, value) => sum + value * value, 0) / values.length)
}

function samplesAfterChange(run: readonly WalkerSample[]): { since: number; isFresh: boolean }[] {
  let since = REST_SAMPLES + 1
  return run.map(({ exact, isFresh }, at) => {
    const before = run[at - 1]?.exact ?? exact
    since = Math.abs(exact / before - 1) > CHANGE_SHARE ? 0 : since + 1
    return { since, isFresh }
  })
}

const share = (samples: readonly { isFresh: boolean }[]): number =>
  samples.length === 0 ? 1 : samples.filter(({ isFresh }) => isFresh).length / samples.length
