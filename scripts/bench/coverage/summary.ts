import { CHOICES, type Choice } from './choices'
import type { UnheardSample } from './unheard'
import type { WithoutSample } from './without-agent'

/** So much over the whole's λ₂ the part's counts as firmer: a false calm. */
export const FIRMER = 1.05

interface Percentiles {
  low: number
  median: number
  high: number
}

export interface UnheardRow extends Percentiles {
  share: number
  choice: Choice
  cases: number
  /** Cases without a fresh reading: withheld, as the silent ones held too many of the walkers, or still settling. */
  notFresh: number
}

export interface WithoutRow extends Percentiles {
  share: number
  choice: Choice
  cases: number
  neighbourShare: number
  fallsApart: number
  firmer: number
}

export function unheardRows(samples: readonly UnheardSample[]): UnheardRow[] {
  return grouped(samples).map(({ share, choice, of }) => {
    const ratios = of.flatMap(({ ratio }) => ratio ?? [])
    return { share, choice, cases: of.length, notFresh: of.length - ratios.length, ...percentiles(ratios) }
  })
}

export function withoutRows(samples: readonly WithoutSample[]): WithoutRow[] {
  return grouped(samples).map(({ share, choice, of }) => ({
    share,
    choice,
    cases: of.length,
    neighbourShare: quantile(
      of.map(({ neighbourShare }) => neighbourShare),
      0.5,
    ),
    fallsApart: of.filter(({ fallsApart }) => fallsApart).length / of.length,
    firmer: of.filter(({ ratio }) => ratio > FIRMER).length / of.length,
    ...percentiles(of.map(({ ratio }) => ratio)),
  }))
}

/** By the way of choosing, then by share. */
function grouped<S extends { share: number; choice: Choice }>(samples: readonly S[]) {
  const shares = [...new Set(samples.map(({ share }) => share))].sort((a, b) => a - b)
  return CHOICES.flatMap((choice) =>
    shares.map((share) => ({
      share,
      choice,
      of: samples.filter((sample) => sample.choice === choice && sample.share === share),
    })),
  )
}

const percentiles = (values: readonly number[]): Percentiles => ({
  low: quantile(values, 0.05),
  median: quantile(values, 0.5),
  high: quantile(values, 0.95),
})

/** Between neighbouring values in proportion. */
export function quantile(values: readonly number[], share: number): number {
  const sorted = [...values].sort((a, b) => a - b)
  const at = share * (sorted.length - 1)
  const [below, above] = [sorted[Math.floor(at)], sorted[Math.ceil(at)]]
  if (below === undefined || above === undefined) return Number.NaN
  return below + (at % 1) * (above - below)
}
