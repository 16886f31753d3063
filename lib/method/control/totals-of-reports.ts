import { noteDrift } from './alignment'
import { bestCut } from './cut'
import { colonyRates } from './rates'
import { heardAgents, type Snapshot } from './snapshot'
import { gather, overlapIn } from './subspace'
import type { Totals } from './totals'

/** From every agent's own report, each brought up to now. */
export function totalsOfReports(before: Snapshot | null, now: Snapshot, intervalMs: number): Totals {
  const heard = heardAgents(now, intervalMs)
  const none: Snapshot = { ...now, agents: [] }
  return {
    atMs: now.atMs,
    isNew: before !== null,
    ratesOf: ({ colony, seeding }) => colonyRates(colony, seeding, before ?? none, now, intervalMs),
    driftOf: (known, colonies) => (before ? noteDrift(known, colonies, before, now, intervalMs) : [...known]),
    subspaceOf: (colonies, drifts) => gather(colonies, heard, drifts, now.atMs),
    cutOf: ({ id }, thresholds, place) => bestCut(id, thresholds, heard, place),
    sidesOf: () => undefined,
    aloneIn: (place) => {
      const sums = heard.flatMap(
        ({ last }) => last.report.sums.sweeps?.find((placed) => placed.place === place) ?? [],
      )
      return sums.length > 0 ? sums.reduce((total, { alone }) => total + alone, 0) : null
    },
    alongLive: (_place, rehearsed, live) => {
      if (!rehearsed.combination || !live.combination) return null
      const colonies = [...live.colonies, ...rehearsed.colonies]
      const both = gather(colonies, heard, [...(live.drift ?? []), ...(rehearsed.drift ?? [])], now.atMs)
      return both && overlapIn(both, rehearsed.combination.terms, live.combination.terms)
    },
  }
}
