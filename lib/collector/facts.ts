import type { Estimate } from '@/lib/method/control'
import { type Follows, labelFollowed } from './follows'
import type { HeadlineInput, JudgedAgent } from './judge'
import type { LevelVerdict } from './level'
import type { Memory } from './memory'
import type { Together } from './unheard'
import type { VerdictFacts } from './verdict'

export interface LevelNow {
  level: Memory['level']
  rule: LevelVerdict['rule']
  rules: string[]
}

export interface Judged {
  level: LevelNow
  trend: Memory['trend']
  together: Together | null
  loose: VerdictFacts['loose']
  parts: VerdictFacts['parts']
  check: VerdictFacts['check']
}

/** What the sentence is made from. */
export function verdictFacts(
  input: HeadlineInput,
  memory: Memory,
  { level, trend, together, loose, parts, check }: Judged,
): VerdictFacts {
  const { estimate, agents, usual } = input
  const { coverage, lambda2 } = estimate
  return {
    state: stateOf(estimate, agents),
    joined: coverage.joined,
    heard: coverage.heard,
    late: coverage.heard - coverage.prompt,
    neverHeard: agents.filter(({ heardAtMs }) => heardAtMs === null).length,
    detached: coverage.heard - coverage.attached,
    level: level.level,
    rule: level.rule,
    trend,
    treatAsSplit: together && describe(together, agents),
    singleCut: memory.singleCut,
    cut: memory.cut,
    follows: memory.singleCut === false || memory.untold ? null : followsOf(agents, memory),
    sidesKnown: Object.keys(memory.sides).length > 0,
    leftOut: input.leftOut ?? [],
    loose,
    parts,
    check,
    whole: input.whole?.lambda2 ?? null,
    shareOfUsual: usual !== null && usual > 0 && lambda2 !== null ? lambda2 / usual : null,
  }
}

export function stateOf(
  { withheld, lambda2, coverage }: Estimate,
  agents: readonly JudgedAgent[],
): VerdictFacts['state'] {
  if (agents.length === 0) return 'nothing-joined'
  if (withheld === 'unheard') {
    if (agents.some(({ heard, heardAtMs }) => !heard && heardAtMs !== null)) return 'unheard'
    // Late are those that may yet be heard in time; never heard are those that may not have been started.
    return coverage.prompt < coverage.heard ? 'late' : 'not-heard-yet'
  }
  if (withheld !== null) return withheld
  return lambda2 === null ? 'starting' : 'reading'
}

export function followsOf(
  agents: readonly Pick<JudgedAgent, 'agentId' | 'labels'>[],
  { sides }: Pick<Memory, 'sides'>,
): Follows | null {
  return labelFollowed(agents.map(({ agentId, labels }) => ({ side: sides[agentId] ?? null, labels })))
}

function describe(
  together: Together,
  agents: readonly JudgedAgent[],
): NonNullable<VerdictFacts['treatAsSplit']> {
  const nodes = together.agentIds.length
  if (together.by === 'label') return { by: 'label', nodes, key: together.key, values: together.values }
  const silent = new Set(together.agentIds)
  const follows = labelFollowed(
    agents.map(({ agentId, labels }) => ({ side: silent.has(agentId) ? 'b' : 'a', labels })),
  )
  return { by: 'cut', nodes, where: follows?.b ?? [] }
}
