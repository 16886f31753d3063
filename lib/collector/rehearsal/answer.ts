import type { RehearsalResult } from '@/lib/data/rehearsal-dto'
import type { RehearsalEstimate } from '@/lib/method/control'
import { floorValue } from '@/lib/warn/condition'
import { floorText } from '@/lib/warn/rule-sentence'
import { levelOf } from '../level'
import type { Memory, Side } from '../memory'
import { other } from '../sides'
import type { OpenRehearsal } from './open'
import type { RoundFacts } from './round'

/** Where links are not named a smaller side is not told of: its links would be those of a few nodes. */
export const LEAST_SIDE_UNNAMED = 5

/** What is known so far, or at the end; null while there is no value yet. */
export function answerOf(
  { teamId }: OpenRehearsal,
  { estimate, found, state }: RehearsalEstimate,
  { reading, memory, floors, meanWeightedDegree, isNamed }: RoundFacts,
): RehearsalResult | null {
  if (!estimate || !found || (estimate.lambda2 === null && !found.isApart)) return null
  const { isApart } = found
  const lambda2 = isApart ? 0 : (estimate.lambda2 ?? 0)
  const value = {
    lambda2,
    low: isApart ? 0 : (estimate.low ?? lambda2),
    high: isApart ? 0 : (estimate.high ?? lambda2),
  }
  const floor = floorOf(teamId, floors, reading.usual)
  const { cut } = estimate
  const { level } = levelOf(
    {
      treatAsSplit: false,
      linksGone: false,
      lambda2,
      meanWeightedDegree,
      usual: reading.usual,
      cut: cut && { links: cut.links, smallerSide: Math.min(cut.above, cut.below) },
      nodes: estimate.coverage.attached,
    },
    [],
  )
  const isSplit = isApart || level === 'split'
  const isShared = estimate.singleCut === false && !isSplit
  const isSmall = cut !== null && Math.min(cut.above, cut.below) < LEAST_SIDE_UNNAMED
  const sides = isShared || (isSmall && !isNamed) ? null : cut
  const isDone = state === 'settled'
  return {
    reading: value,
    level: isApart ? 'split' : level,
    sides: sides && sidesOf(sides, found.isTurned, memory.cut),
    crossingLinks: sides?.links ?? null,
    live: liveOf(reading),
    floor,
    answer: !isDone ? null : isSplit ? 'splits' : floor && lambda2 < floor.lambda2 ? 'below-floor' : 'holds',
    waves: null,
  }
}

function liveOf({ core, lambda2, low, high }: RoundFacts['reading']): RehearsalResult['live'] {
  if (core) return core
  return lambda2 === null ? null : { lambda2, low: low ?? lambda2, high: high ?? lambda2 }
}

/** The highest of the team's own rules for the least reading. */
function floorOf(
  teamId: string,
  floors: RoundFacts['floors'],
  usual: number | null,
): RehearsalResult['floor'] {
  const known = floors.flatMap(({ teamId: of, floor }) => {
    const lambda2 = of === teamId ? floorValue(floor, usual) : null
    return lambda2 === null ? [] : [{ lambda2, because: `warning rule: reading under ${floorText(floor)}` }]
  })
  return known.reduce<RehearsalResult['floor']>((a, b) => (a && a.lambda2 >= b.lambda2 ? a : b), null)
}

/** Named as the live sides are that they fall together with most. */
function sidesOf(
  { above, below }: { above: number; below: number },
  isTurned: boolean | null,
  live: Memory['cut'],
): NonNullable<RehearsalResult['sides']> {
  const larger: Side = above >= below ? 'a' : 'b'
  const aboveIs = live && isTurned !== null ? (isTurned ? other(live.aboveIs) : live.aboveIs) : larger
  const [a, b] = aboveIs === 'a' ? [above, below] : [below, above]
  return [
    { name: 'a', nodes: a },
    { name: 'b', nodes: b },
  ]
}
