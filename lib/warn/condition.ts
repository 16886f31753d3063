import type { WarnFacts } from './facts'
import type { Fall } from './falling'
import type { Condition } from './hysteresis'
import type { Floor, RuleSettings } from './rule'

/** @returns λ₂ of the floor; null while nothing is known to be usual */
export function floorValue(floor: Floor, usual: number | null): number | null {
  if (floor.of === 'value') return floor.lambda2
  return usual === null ? null : (floor.percent / 100) * usual
}

/**
 * What a rule's settings say of one moment.
 * @param clearMarginPercent how far past its limit a figure must come back, per cent of the limit
 * @param fall of the means up to this moment, for a falling rule; null while there are too few
 */
export function conditionOf(
  settings: RuleSettings,
  facts: WarnFacts,
  { clearMarginPercent, fall }: { clearMarginPercent: number; fall: Fall | null },
): Condition {
  const margin = 1 + clearMarginPercent / 100
  switch (settings.kind) {
    case 'floor':
      return belowLimit(freshLambda2(facts), floorValue(settings.floor, facts.usual), margin)
    case 'few-links':
      return fewLinks(settings, facts, margin)
    case 'falling':
      if (fall === null) return 'unknown'
      if (fall.falls && fall.probability * 100 >= settings.probabilityPercent) return 'holds'
      return fall.probability * 100 * margin < settings.probabilityPercent ? 'over' : 'between'
    case 'split':
      if (facts.treatAsSplit || facts.level === 'split') return 'holds'
      return facts.isFresh ? 'over' : 'unknown'
    case 'unheard':
      return facts.joined - facts.heard >= settings.agents ? 'holds' : 'over'
    case 'coverage':
      return coverage(settings.percent, facts, margin)
    case 'audit':
      if (facts.check === 'apart' || facts.leftOut > 0) return 'holds'
      return facts.isFresh ? 'over' : 'unknown'
  }
}

const freshLambda2 = ({ isFresh, lambda2 }: WarnFacts): number | null => (isFresh ? lambda2 : null)

function belowLimit(value: number | null, limit: number | null, margin: number): Condition {
  if (value === null || limit === null) return 'unknown'
  if (value < limit) return 'holds'
  return value >= limit * margin ? 'over' : 'between'
}

function fewLinks(
  { links, smallerSidePercent }: Extract<RuleSettings, { kind: 'few-links' }>,
  { isFresh, crossingLinks, smallerSide, heard }: WarnFacts,
  margin: number,
): Condition {
  if (!isFresh) return 'unknown'
  // No single cut stands out, or what hangs on few links is a loose end.
  if (crossingLinks === null || smallerSide === null || heard === 0) return 'over'
  if (smallerSide < (smallerSidePercent / 100) * heard) return 'over'
  if (crossingLinks <= links) return 'holds'
  return crossingLinks >= Math.max(links + 1, links * margin) ? 'over' : 'between'
}

function coverage(
  percent: number,
  { joined, heard, linksKnown, linksMeasured }: WarnFacts,
  margin: number,
): Condition {
  if (joined === 0) return 'unknown'
  const shares = [heard / joined, linksKnown ? (linksMeasured ?? 0) / linksKnown : 1]
  const least = 100 * Math.min(...shares)
  if (least < percent) return 'holds'
  // Nothing can be better than all of it.
  return least >= Math.min(100, percent * margin) ? 'over' : 'between'
}
