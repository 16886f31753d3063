import type { Excluded, RehearsalDto, RehearsalPlan, RehearsalResult } from '@/lib/data/rehearsal-dto'
import type { Floor } from '@/lib/warn/rule'

/** A rehearsal that waits or runs, as its row says it. */
export interface OpenRehearsal {
  id: string
  teamId: string
  incidentId: string | null
  state: 'waiting' | 'running'
  startsAtMs: number | null
  startedAtMs: number | null
  progress: number
  exclude: Excluded
  taken: number | null
  remain: number | null
  result: RehearsalResult | null
  /** What is said already while waves are looked for. */
  verdict: string | null
  plan: RehearsalPlan | null
}

/** A team's rule for the least reading. */
export interface TeamFloor {
  teamId: string
  floor: Floor
}

/** What a round changes of one; written only while it is still open. */
export interface RehearsalChange {
  id: string
  incidentId: string | null
  state: RehearsalDto['state']
  progress: number
  expectedAtMs: number | null
  startedAtMs: number | null
  taken: number | null
  remain: number | null
  result: RehearsalResult | null
  verdict: string | null
  plan: RehearsalPlan | null
  /** For the overlay's timeline; an end also for the incident's. */
  says: { kind: 'rehearsal-started' | 'rehearsal-ended'; text: string } | null
}
