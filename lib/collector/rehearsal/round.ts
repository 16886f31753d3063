import type { Reading } from '@/lib/data/dto'
import {
  MOST_REFUSED_NAMES,
  MOST_REHEARSALS,
  type RehearsalEstimate,
  type Rehearsed,
} from '@/lib/method/control'
import { COLONIES_EACH } from '@/lib/method/control/rehearsal-verdict'
import type { Memory } from '../memory'
import { answerOf } from './answer'
import type { OpenRehearsal, RehearsalChange, TeamFloor } from './open'
import { type Taken, type TakenFrom, takenOf } from './taken'
import { failureSentence, verdictSentence } from './verdict'
import { takenWords } from './words'

interface Running {
  row: OpenRehearsal
  taken: Taken
  isNew: boolean
}

export interface RehearsalPlanned {
  /** For the control loop. */
  rehearsed: Rehearsed[]
  running: Running[]
  /** Those that cannot begin. */
  refused: RehearsalChange[]
}

/** Which rehearsals run from this round on: those that do, and those that are due, the longest due first, as far as there is room. */
export function planRehearsals(
  open: readonly OpenRehearsal[],
  from: TakenFrom,
  atMs: number,
): RehearsalPlanned {
  const due = open
    .filter(({ state, startsAtMs }) => state === 'running' || startsAtMs === null || startsAtMs <= atMs)
    .sort((a, b) => (a.state === b.state ? 0 : a.state === 'running' ? -1 : 1))
  const planned: RehearsalPlanned = { rehearsed: [], running: [], refused: [] }
  let names = 0
  for (const row of due) {
    const resolved = takenOf(row.exclude, from, false)
    if ('problems' in resolved) {
      // Of one that runs, those that have left may have been the last.
      const because = resolved.problems.map(({ message }) => message).join(' ')
      planned.refused.push(endOf(row, 'failed', because))
      continue
    }
    const { taken } = resolved
    const its = COLONIES_EACH * (taken.agents.length + 2 * taken.links.length)
    if (planned.running.length >= MOST_REHEARSALS) continue
    if (names > 0 && names + its > MOST_REFUSED_NAMES) continue
    names += its
    planned.running.push({ row, taken, isNew: row.state === 'waiting' })
    planned.rehearsed.push({ id: row.id, agents: taken.agents, links: taken.links })
  }
  return planned
}

export interface RoundFacts {
  atMs: number
  reading: Reading
  memory: Memory
  floors: readonly TeamFloor[]
  meanWeightedDegree: number
  nameOf: (agentId: string) => string
}

/** What the round says of each of them. */
export function tellRehearsals(
  { running, refused }: RehearsalPlanned,
  estimates: readonly RehearsalEstimate[],
  facts: RoundFacts,
): RehearsalChange[] {
  return [
    ...refused,
    ...running.map((one) => changeOf(one, estimates.find(({ id }) => id === one.row.id) ?? null, facts)),
  ]
}

function changeOf(
  { row, taken, isNew }: Running,
  estimate: RehearsalEstimate | null,
  facts: RoundFacts,
): RehearsalChange {
  const words = takenWords(row.exclude)
  const change: RehearsalChange = {
    id: row.id,
    incidentId: row.incidentId,
    state: 'running',
    progress: Math.max(row.progress, estimate?.progress ?? 0),
    expectedAtMs: estimate?.endsInMs == null ? null : facts.atMs + estimate.endsInMs,
    startedAtMs: row.startedAtMs ?? facts.atMs,
    taken: row.taken ?? taken.agents.length,
    remain: estimate?.remain ?? row.remain ?? taken.remain,
    result: row.result,
    verdict: null,
    plan: row.plan,
    says: isNew ? { kind: 'rehearsal-started', text: `Rehearsal started: ${words} away` } : null,
  }
  if (!estimate) return change
  if (estimate.state === 'failed') {
    const because = failureSentence(estimate.because ?? 'no-time', estimate.tooOld.map(facts.nameOf))
    return { ...endOf(row, 'failed', because), ...kept(change) }
  }
  const result = answerOf(row, estimate, facts) ?? row.result
  if (estimate.state !== 'settled' || !result) return { ...change, result }
  const verdict = verdictSentence(words, result, estimate)
  return { ...endOf(row, 'done', verdict), ...kept(change), result, progress: 1 }
}

const kept = ({ startedAtMs, taken, remain, progress }: RehearsalChange) => ({
  startedAtMs,
  taken,
  remain,
  progress,
})

function endOf(row: OpenRehearsal, state: 'done' | 'failed', verdict: string): RehearsalChange {
  const words = takenWords(row.exclude)
  return {
    id: row.id,
    incidentId: row.incidentId,
    state,
    progress: row.progress,
    expectedAtMs: null,
    startedAtMs: row.startedAtMs,
    taken: row.taken,
    remain: row.remain,
    result: row.result,
    verdict,
    plan: null,
    says: {
      kind: 'rehearsal-ended',
      text: state === 'done' ? verdict : `Rehearsal failed: ${words} away. ${verdict}`,
    },
  }
}
