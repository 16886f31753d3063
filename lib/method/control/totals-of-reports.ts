import { noteDrift } from './alignment'
import { bestCut } from './cut'
import { colonyRates } from './rates'
import { heardAgents, type Snapshot } from './snapshot'
import { gather } from './subspace'
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
  }
}
