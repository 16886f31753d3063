import { floorValue } from '@/lib/warn/condition'
import { DEFAULT_RULES } from '@/lib/warn/default-rules'
import { fallOf } from '@/lib/warn/falling'
import { type FallingSettings, Means } from '@/lib/warn/means'
import type { Thinning } from './courses'

/** What a falling rule foretold at one moment, and whether it came. */
export interface Forecast {
  probability: number
  /** The reading was under the floor, for the median of a mean's time, within the hours asked for. */
  came: boolean
}

const HOUR_MS = 3_600_000
const BINS = [0, 0.1, 0.3, 0.5, 0.7, 0.9, 1.0000001]

/** All forecasts that a significant fall gave while links thinned. The outcome is the surrogate's mean, so noise counts on both sides. */
export function calibration({ facts, beganAtMs, lastGoneAtMs }: Thinning): Forecast[] {
  return DEFAULT_RULES.flatMap(({ settings }) => {
    if (settings.kind !== 'falling') return []
    return forecastsOf(settings, { facts, beganAtMs, lastGoneAtMs })
  })
}

function forecastsOf(
  settings: FallingSettings,
  { facts, beganAtMs, lastGoneAtMs }: Omit<Thinning, 'oneLeftAtMs'>,
): Forecast[] {
  const usual = facts[0]?.usual ?? null
  const floor = floorValue(settings.floor, usual)
  if (floor === null) return []
  const { windowHours, withinHours } = settings
  const all = new Means({ means: settings.means, windowHours: 10_000 })
  const seen = new Means({ means: settings.means, windowHours })
  const made: { atMs: number; probability: number }[] = []
  for (const fact of facts) {
    all.add(fact)
    // What lies beyond the last link cannot be told apart: the forecast is of the fall.
    if (!seen.add(fact) || fact.atMs < beganAtMs || fact.atMs > lastGoneAtMs) continue
    const fall = fallOf(seen.before(fact.atMs), {
      floorLambda2: floor,
      withinMs: withinHours * HOUR_MS,
      nowMs: fact.atMs,
    })
    if (fall?.falls) made.push({ atMs: fact.atMs, probability: fall.probability })
  }
  const means = all.before(facts[facts.length - 1]?.atMs ?? 0)
  return made.map(({ atMs, probability }) => ({
    probability,
    came: means.some(
      (mean) => mean.atMs >= atMs && mean.atMs <= atMs + withinHours * HOUR_MS && mean.value < floor,
    ),
  }))
}

export function printCalibration(forecasts: readonly Forecast[], print: (line: string) => void): void {
  for (const [index, least] of BINS.slice(0, -1).entries()) {
    const below = BINS[index + 1]!
    const within = forecasts.filter(({ probability }) => probability >= least && probability < below)
    const mean = within.reduce((sum, { probability }) => sum + probability, 0) / within.length
    const came = within.filter((forecast) => forecast.came).length
    print(
      within.length === 0
        ? `${(100 * least).toFixed(0)} to ${Math.min(100, 100 * below).toFixed(0)} %: none`
        : `${(100 * least).toFixed(0)} to ${Math.min(100, 100 * below).toFixed(0)} %: ${within.length} forecasts, mean ${(100 * mean).toFixed(0)} %; came true ${((100 * came) / within.length).toFixed(0)} %`,
    )
  }
}
