import type { Reading } from '@/lib/data/dto'
import type { RehearsalPlan } from '@/lib/data/rehearsal-dto'
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
import { type TakableAgent, type Taken, type TakenFrom, takenOf } from './taken'
import { inTurn } from './turns'
import { failureSentence, verdictSentence } from './verdict'
import { firstWave, nextWave, type WaveNode, wavesSentence } from './waves'
import { takenWords } from './words'

interface Running {
  row: OpenRehearsal
  /** By what name the control loop knows it: another one for each wave. */
  key: string
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

/** An agent, and whose it is: a team takes away its own. */
export type TeamAgent = Omit<TakableAgent, 'isOwn'> & { teamId: string }

/** Which rehearsals run from this round on: those that do, and those that are due, the longest due first, as far as there is room. */
export function planRehearsals(
  open: readonly OpenRehearsal[],
  from: Omit<TakenFrom, 'agents'> & { agents: readonly TeamAgent[] },
  atMs: number,
): RehearsalPlanned {
  const due = inTurn(
    open.filter(({ state, startsAtMs }) => state === 'running' || startsAtMs === null || startsAtMs <= atMs),
  )
  const planned: RehearsalPlanned = { rehearsed: [], running: [], refused: [] }
  let names = 0
  for (const row of due) {
    const agentsFor = from.agents.map((agent) => ({ ...agent, isOwn: agent.teamId === row.teamId }))
    const resolved = takenOf(row.exclude, { ...from, agents: agentsFor }, false)
    if ('problems' in resolved) {
      // Of one that runs, those that have left may have been the last.
      const because = resolved.problems.map(({ message }) => message).join(' ')
      planned.refused.push(endOf(row, 'failed', because))
      continue
    }
    const { taken } = resolved
    // One wave of what is to go.
    const tried = row.plan && agentsFor.filter(({ name, isOwn }) => isOwn && row.plan?.tried.includes(name))
    const agents = tried ? tried.map(({ agentId }) => agentId) : taken.agents
    const its = COLONIES_EACH * (agents.length + 2 * taken.links.length)
    if (planned.running.length >= MOST_REHEARSALS) continue
    if (names > 0 && names + its > MOST_REFUSED_NAMES) continue
    names += its
    const key = row.plan ? `${row.id} ${row.plan.tries}` : row.id
    planned.running.push({ row, key, taken, isNew: row.state === 'waiting' })
    planned.rehearsed.push({ id: key, agents, links: taken.links })
  }
  return planned
}

export interface RoundFacts {
  atMs: number
  reading: Reading
  memory: Memory
  floors: readonly TeamFloor[]
  meanWeightedDegree: number
  agents: readonly (WaveNode & { agentId: string; teamId: string })[]
  intervalMs: number
  /** Links may be named, and so may what is known of a few nodes. */
  isNamed: boolean
}

/** What the round says of each of them. */
export function tellRehearsals(
  { running, refused }: RehearsalPlanned,
  estimates: readonly RehearsalEstimate[],
  facts: RoundFacts,
): RehearsalChange[] {
  return [
    ...refused,
    ...running.map((one) => changeOf(one, estimates.find(({ id }) => id === one.key) ?? null, facts)),
  ]
}

function changeOf(
  { row, taken, isNew }: Running,
  estimate: RehearsalEstimate | null,
  facts: RoundFacts,
): RehearsalChange {
  const words = takenWords(row.exclude)
  // Where it takes several nodes waves may have to be tried after it.
  const mayTakeWaves = taken.agents.length > 1 && taken.links.length === 0
  const change: RehearsalChange = {
    id: row.id,
    incidentId: row.incidentId,
    state: 'running',
    progress: Math.max(row.progress, (estimate?.progress ?? 0) * (mayTakeWaves ? BEFORE_WAVES : 1)),
    expectedAtMs: estimate?.endsInMs == null ? null : facts.atMs + estimate.endsInMs,
    startedAtMs: row.startedAtMs ?? facts.atMs,
    taken: row.taken ?? taken.agents.length,
    remain: row.remain ?? taken.remain,
    result: row.result,
    verdict: null,
    plan: row.plan,
    says: isNew ? { kind: 'rehearsal-started', text: `Rehearsal started: ${words} away` } : null,
  }
  if (!estimate) return change
  if (row.plan) return waveChange(row, row.plan, change, estimate, facts)
  if (estimate.state === 'failed') {
    const because = failureSentence(estimate.because ?? 'no-time', estimate.tooOld.map(nameFor(row, facts)))
    return { ...endOf(row, 'failed', because), ...kept(change) }
  }
  const result = answerOf(row, estimate, facts) ?? row.result
  if (estimate.state !== 'settled' || !result) return { ...change, result }
  const verdict = verdictSentence(words, result, {
    alone: facts.isNamed ? (estimate.found?.alone ?? 0) : 0,
    loose: estimate.loose,
  })
  if (result.answer !== 'holds' && mayTakeWaves) {
    const nodes = facts.agents.filter(({ agentId }) => taken.agents.includes(agentId))
    const plan = firstWave(nodes)
    return {
      ...change,
      result,
      verdict,
      plan,
      progress: BEFORE_WAVES,
      expectedAtMs: wavesEndAtMs(plan, 0, facts),
    }
  }
  return { ...endOf(row, 'done', verdict), ...kept(change), result, progress: 1 }
}

/** Share of the progress that is shown before waves are tried. */
const BEFORE_WAVES = 0.5
/** A wave takes about so long. */
const WAVE_INTERVALS = 30

/** One wave after the other, the answer for all at once being known. */
function waveChange(
  row: OpenRehearsal,
  plan: RehearsalPlan,
  change: RehearsalChange,
  estimate: RehearsalEstimate,
  facts: RoundFacts,
): RehearsalChange {
  const isOver = estimate.state === 'settled' || estimate.state === 'failed'
  const total = plan.left.length + plan.held.reduce((sum, { nodes }) => sum + nodes.length, 0)
  const waiting = (now: RehearsalPlan, share: number): RehearsalChange => ({
    ...change,
    verdict: row.verdict,
    plan: now,
    progress: Math.max(
      row.progress,
      BEFORE_WAVES + 0.45 * (1 - (now.left.length - share * now.tried.length) / total),
    ),
    expectedAtMs: wavesEndAtMs(now, share, facts),
  })
  if (!isOver) return waiting(plan, estimate.progress)
  const answer = answerOf(row, estimate, facts)
  const next = nextWave(
    plan,
    estimate.state === 'failed' || !answer?.reading || answer.answer === null
      ? 'no-answer'
      : answer.answer === 'holds'
        ? { holds: answer.reading }
        : 'does-not-hold',
  )
  if ('plan' in next) return waiting(next.plan, 0)
  const verdict = `${row.verdict ?? ''} ${wavesSentence(next.end)}`.trim()
  const result = row.result && { ...row.result, waves: next.end.waves }
  return { ...endOf(row, 'done', verdict), ...kept(change), result, progress: 1 }
}

/** If all that are left hold as they are now tried. */
function wavesEndAtMs(
  { left, tried }: RehearsalPlan,
  share: number,
  { atMs, intervalMs }: RoundFacts,
): number {
  const waves = Math.ceil(left.length / Math.max(1, tried.length)) - share
  return atMs + waves * WAVE_INTERVALS * intervalMs
}

const nameFor =
  ({ teamId }: OpenRehearsal, { agents }: RoundFacts) =>
  (id: string): string => {
    const agent = agents.find(({ agentId }) => agentId === id)
    return agent?.teamId === teamId ? agent.name : 'a node of another team'
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
