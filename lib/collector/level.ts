import type { Level } from './memory'

/** Below this share of the mean weighted degree λ₂ is as good as zero. */
export const AS_GOOD_AS_ZERO = 1e-3
export const WEAK_SHARE_OF_USUAL = 0.6
export const WEAK_UNTIL_SHARE_OF_USUAL = 0.7
export const FEW_LINKS = 3
export const ENOUGH_LINKS_AGAIN = 5
/** A side smaller than this is a loose end, not a weak place of the whole. */
export const LEAST_SIDE_NODES = 2
export const LEAST_SIDE_SHARE = 0.1

export interface LevelFacts {
  treatAsSplit: boolean
  /** Agents are heard and had links before, but hardly one has a link now. */
  linksGone: boolean
  lambda2: number | null
  meanWeightedDegree: number
  usual: number | null
  cut: { links: number; smallerSide: number } | null
  nodes: number
}

export const LEVEL_RULES = [
  {
    name: 'treat-as-split',
    level: 'split',
    begins: ({ treatAsSplit }) => treatAsSplit,
    lasts: ({ treatAsSplit }) => treatAsSplit,
  },
  {
    name: 'links-gone',
    level: 'split',
    begins: ({ linksGone }) => linksGone,
    lasts: ({ linksGone }) => linksGone,
  },
  {
    name: 'nothing-crosses',
    level: 'split',
    begins: (facts) => facts.cut?.links === 0 || isAsGoodAsZero(facts),
    lasts: (facts) => facts.cut?.links === 0 || isAsGoodAsZero(facts),
  },
  {
    name: 'below-usual',
    level: 'weak',
    begins: (facts) => shareOfUsual(facts) < WEAK_SHARE_OF_USUAL,
    lasts: (facts) => shareOfUsual(facts) <= WEAK_UNTIL_SHARE_OF_USUAL,
  },
  {
    name: 'few-links',
    level: 'weak',
    begins: ({ cut, nodes }) => cut !== null && cut.links <= FEW_LINKS && isRealSide(cut.smallerSide, nodes),
    lasts: ({ cut, nodes }) =>
      cut !== null && cut.links < ENOUGH_LINKS_AGAIN && isRealSide(cut.smallerSide, nodes),
  },
] as const satisfies readonly LevelRule[]

interface LevelRule {
  name: string
  level: Level
  begins(facts: LevelFacts): boolean
  /** While the rule is in force: ends later than it began, so that a reading at the edge does not flutter. */
  lasts(facts: LevelFacts): boolean
}

export type RuleName = (typeof LEVEL_RULES)[number]['name']

export interface LevelVerdict {
  level: Level
  /** The rule that decided; null for firm. */
  rule: RuleName | null
  /** All rules in force. */
  rules: RuleName[]
}

/** The first rule in force decides; where none is, the overlay is firm. */
export function levelOf(facts: LevelFacts, inForce: readonly string[]): LevelVerdict {
  const matching = LEVEL_RULES.filter((rule) =>
    inForce.includes(rule.name) ? rule.lasts(facts) : rule.begins(facts),
  )
  const rules = matching.map(({ name }) => name)
  return { level: matching[0]?.level ?? 'firm', rule: rules[0] ?? null, rules }
}

/** Whether any of these rules says that the overlay is not as it usually is. Few links may be how it is built. */
export function isGrave(rules: readonly string[]): boolean {
  return LEVEL_RULES.some(
    ({ name, level }) => rules.includes(name) && (level === 'split' || name === 'below-usual'),
  )
}

const ORDER: Record<Level, number> = { firm: 0, weak: 1, split: 2 }

export function worse(a: Level | null, b: Level | null): Level | null {
  if (a === null || b === null) return a ?? b
  return ORDER[a] >= ORDER[b] ? a : b
}

function isAsGoodAsZero({ lambda2, meanWeightedDegree }: LevelFacts): boolean {
  return lambda2 !== null && lambda2 < AS_GOOD_AS_ZERO * meanWeightedDegree
}

/** Infinity where it cannot be said. */
function shareOfUsual({ lambda2, usual }: LevelFacts): number {
  return lambda2 === null || usual === null || usual <= 0 ? Number.POSITIVE_INFINITY : lambda2 / usual
}

function isRealSide(smaller: number, nodes: number): boolean {
  return smaller >= Math.max(LEAST_SIDE_NODES, LEAST_SIDE_SHARE * nodes)
}
