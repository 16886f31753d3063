import type { EVENT_KINDS, Reading } from '@/lib/data/dto'
import type { CoreEstimate, Estimate, PartEstimate } from '@/lib/method/control'
import { checkNow } from './check'
import { type LevelNow, stateOf, verdictFacts } from './facts'
import { happenings } from './happenings'
import { type Headline, headlineOf, looseTexts, memoryFor } from './headline'
import { isGrave, levelOf, worse } from './level'
import type { Memory, Side } from './memory'
import { partsTold } from './parts'
import { readingOf } from './reading'
import type { Said } from './said'
import { nameSides } from './sides'
import { trendOf, withReading } from './trend'
import { type Together, unheardTogether } from './unheard'
import { type VerdictFacts, verdictOf } from './verdict'

/** After a pause in listening everybody looks silent at once; so long nothing new is made of silence. */
export const LISTENING_INTERVALS = 10
/** A longer pause than this between evaluations is one in listening. */
export const PAUSE_INTERVALS = 3
/** Second Ritz value over first from which a cut stands out again, once none did. */
export const SINGLE_AGAIN = 1.3
/** While nothing changes and there is no reading, a row this often says that the leader lives. */
export const STORE_UNCHANGED_INTERVALS = 10

export interface JudgedAgent {
  agentId: string
  name: string
  labels: Readonly<Record<string, string>>
  joinedAtMs: number
  heard: boolean
  heardAtMs: number | null
  attached: boolean
  value: { sweep: number; value: number } | null
}

export interface JudgeInput {
  /** Of the whole overlay. */
  estimate: Estimate
  /** Null or missing while nothing hangs loose. */
  core?: CoreEstimate | null
  /** Links are named, so loose nodes may be. */
  isNamed?: boolean
  /** Each piece by itself; empty or missing while the overlay has not come apart. */
  parts?: readonly PartEstimate[]
  agents: readonly JudgedAgent[]
  memory: Memory
  /** Combination now in the orders; null while there is none. */
  combination: number | null
  meanWeightedDegree: number
  usual: number | null
  intervalMs: number
  /** Agents of the overlay whose figures did not hold. */
  leftOut?: VerdictFacts['leftOut']
}

export interface EventDraft {
  kind: (typeof EVENT_KINDS)[number]
  text: string
  /** The text in parts, where it names nodes. */
  said?: Said
  /** The one team it is told to; left out, all that share the overlay. */
  teamId?: string
  /** What a program looks up later, beside the line for a person. */
  data?: { links: [a: string, b: string][] }
}

export interface Judgement {
  reading: Reading
  memory: Memory
  events: EventDraft[]
  /** What the sentences are made from: each team that shares the overlay is told them in its own names. */
  facts: VerdictFacts
  /** Whether the reading is worth a row. */
  store: boolean
}

/** From an estimate in numbers to what is said of the overlay. Pure. */
export function judge(given: JudgeInput): Judgement {
  const headline = headlineOf(given.estimate, given.core ?? null, given.memory)
  return judgeHeadline({ ...given, ...headline, memory: memoryFor(given.memory, headline) })
}

/** `estimate` is the headline here. */
export type HeadlineInput = JudgeInput & Pick<Headline, 'estimate' | 'whole'>

function judgeHeadline(input: HeadlineInput): Judgement {
  const { estimate, agents, intervalMs } = input
  const memory = withCut(listening(input.memory, estimate.atMs, intervalMs), input)
  const data = dataOf(estimate, agents)
  const together = togetherNow(memory, input)
  const level = levelNow(memory, input, data, together !== null)
  const recent =
    data === 'fresh' && estimate.lambda2 !== null
      ? withReading(memory.recent, [estimate.atMs, estimate.lambda2, halfOf(estimate)], intervalMs)
      : memory.recent
  const trend = data === 'fresh' ? trendOf(recent) : memory.trend
  const loose = looseTexts(input.core ?? null, agents, input.isNamed ?? false)
  const parts = partsTold(input.parts ?? [], agents, memory)
  const isSplit = level.level === 'split'
  const { apartSinceMs, check } = checkNow(memory, input.whole ?? estimate, { isSplit, intervalMs })
  const facts = verdictFacts(input, memory, { level, trend, together, loose, parts, check })
  const { verdict, detail } = verdictOf(facts)
  const next: Memory = {
    ...memory,
    level: level.level,
    trend,
    rules: level.rules,
    treatAsSplit: together !== null,
    recent,
    last:
      data === 'fresh' && estimate.lambda2 !== null
        ? { atMs: estimate.atMs, lambda2: estimate.lambda2 }
        : memory.last,
    unheard: unheardNow(agents),
    usual: input.usual,
    graveSinceMs: isGrave(level.rules) ? (memory.graveSinceMs ?? estimate.atMs) : null,
    withheld: data === 'unheard',
    apartSinceMs,
    judgedAtMs: estimate.atMs,
  }
  const reading = readingOf(input, next, { verdict, detail, data, check, parts })
  const key = JSON.stringify([verdict, detail, reading.level, data])
  const store =
    estimate.lambda2 !== null ||
    memory.stored?.key !== key ||
    estimate.atMs - memory.stored.atMs >= STORE_UNCHANGED_INTERVALS * intervalMs
  if (store) next.stored = { atMs: estimate.atMs, key }
  return { reading, memory: next, events: happenings(memory, next, agents, facts), facts, store }
}

function listening(memory: Memory, atMs: number, intervalMs: number): Memory {
  const paused = memory.judgedAtMs === null || atMs - memory.judgedAtMs > PAUSE_INTERVALS * intervalMs
  return paused ? { ...memory, listeningSinceMs: atMs } : memory
}

function withCut(memory: Memory, { estimate, agents, combination, isNamed }: JudgeInput): Memory {
  // Orders without a combination come with a start from cold, and the next one may have the other sign.
  const signSince = combination === null ? null : (memory.signSince ?? combination)
  const singleCut = singleCutNow(memory, estimate)
  const next = { ...memory, signSince, singleCut }
  const { cut } = estimate
  if (!cut || signSince === null || cut.sweep === memory.cut?.sweep) return next
  const named = nameSides({ cut, signSince, agents, before: memory, tellsRarely: isNamed === false })
  return named ? { ...next, ...named } : next
}

/** So that sides do not come and go while two cuts are about equally weak. */
function singleCutNow(memory: Memory, { singleCut, lambda2, lambda3AtMost }: Estimate): boolean | null {
  if (singleCut === null || lambda2 === null || lambda3AtMost === null) return memory.singleCut
  if (memory.singleCut !== false) return singleCut
  return lambda3AtMost > SINGLE_AGAIN * lambda2
}

function dataOf(estimate: Estimate, agents: readonly JudgedAgent[]): Reading['data'] {
  const state = stateOf(estimate, agents)
  if (state === 'unheard' || state === 'late') return 'unheard'
  return estimate.withheld === null && !estimate.settling ? 'fresh' : 'settling'
}

function togetherNow(memory: Memory, { estimate, agents, intervalMs }: JudgeInput): Together | null {
  const since = memory.listeningSinceMs ?? estimate.atMs
  const long = estimate.atMs - since >= LISTENING_INTERVALS * intervalMs
  if (!long && !memory.treatAsSplit) return null
  const sideOf = ({ agentId }: JudgedAgent): Side | null =>
    memory.singleCut === false ? null : (memory.sides[agentId] ?? null)
  return unheardTogether(
    agents.map((agent) => ({ ...agent, side: sideOf(agent) })),
    intervalMs,
  )
}

/** Only a fresh reading may better the level; facts that make it worse count at once. */
function levelNow(
  memory: Memory,
  { estimate, agents, meanWeightedDegree, usual }: JudgeInput,
  data: Reading['data'],
  treatAsSplit: boolean,
): LevelNow {
  const { coverage, lambda2 } = estimate
  const judged = levelOf(
    {
      treatAsSplit,
      linksGone: estimate.withheld === 'too-few-nodes' && coverage.heard >= 2 && memory.last !== null,
      lambda2,
      meanWeightedDegree,
      usual,
      cut:
        lambda2 === null || !estimate.cut
          ? null
          : {
              links: estimate.cut.links,
              smallerSide: Math.min(estimate.cut.above, estimate.cut.below),
            },
      nodes: coverage.attached || agents.length,
    },
    memory.rules,
  )
  if (data === 'fresh') return judged
  const grave =
    judged.level === 'firm' || (memory.level === null && judged.level !== 'split') ? null : judged.level
  const level = worse(memory.level, grave)
  const decides = level !== null && level === grave
  return { level, rule: decides ? judged.rule : null, rules: decides ? judged.rules : memory.rules }
}

function halfOf({ low, high }: Estimate): number {
  return low === null || high === null ? 0 : (high - low) / 2
}

function unheardNow(agents: readonly JudgedAgent[]): Memory['unheard'] {
  return Object.fromEntries(
    agents.flatMap(({ agentId, heard, heardAtMs }) =>
      !heard && heardAtMs !== null ? [[agentId, heardAtMs] as const] : [],
    ),
  )
}
