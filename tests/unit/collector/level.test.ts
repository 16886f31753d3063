import { describe, expect, it } from 'vitest'
import { type LevelFacts, type LevelVerdict, levelOf, worse } from '@/lib/collector/level'

/** A calm overlay of 36 nodes. */
const calm: LevelFacts = {
  treatAsSplit: false,
  linksGone: false,
  lambda2: 0.66,
  meanWeightedDegree: 6,
  usual: 0.66,
  cut: { links: 12, smallerSide: 18 },
  nodes: 36,
}

const firm: LevelVerdict = { level: 'firm', rule: null, rules: [] }
const by = (
  level: LevelVerdict['level'],
  rule: NonNullable<LevelVerdict['rule']>,
  ...others: LevelVerdict['rules']
): LevelVerdict => ({ level, rule, rules: [rule, ...others] })

const table: [string, Partial<LevelFacts>, string[], LevelVerdict][] = [
  ['an overlay as it usually is, is firm', {}, [], firm],
  [
    'agents unheard together are treated as a split',
    { treatAsSplit: true },
    [],
    by('split', 'treat-as-split'),
  ],
  [
    'a split outweighs a weak cut',
    { treatAsSplit: true, cut: { links: 2, smallerSide: 18 } },
    [],
    by('split', 'treat-as-split', 'few-links'),
  ],
  [
    'nodes that are heard but have lost their links are split',
    { linksGone: true },
    [],
    by('split', 'links-gone'),
  ],
  [
    'a cut that no link crosses is a split',
    { cut: { links: 0, smallerSide: 18 } },
    [],
    by('split', 'nothing-crosses', 'few-links'),
  ],
  [
    'a cut that no link crosses is a split however small its side',
    { cut: { links: 0, smallerSide: 1 } },
    [],
    by('split', 'nothing-crosses'),
  ],
  [
    'λ₂ below a thousandth of the mean weighted degree is a split',
    { lambda2: 0.0059, usual: null },
    [],
    by('split', 'nothing-crosses'),
  ],
  ['λ₂ of a thousandth of the mean weighted degree is not', { lambda2: 0.006, usual: null }, [], firm],
  ['59 % of the usual is weak', { lambda2: 0.59, usual: 1 }, [], by('weak', 'below-usual')],
  ['60 % of the usual is firm', { lambda2: 0.6, usual: 1 }, [], firm],
  [
    'once weak, 70 % of the usual is still weak',
    { lambda2: 0.7, usual: 1 },
    ['below-usual'],
    by('weak', 'below-usual'),
  ],
  ['once weak, 71 % of the usual is firm again', { lambda2: 0.71, usual: 1 }, ['below-usual'], firm],
  ['without a usual nothing is said against it', { lambda2: 0.01, usual: null }, [], firm],
  ['three crossing links are weak', { cut: { links: 3, smallerSide: 18 } }, [], by('weak', 'few-links')],
  ['four crossing links are firm', { cut: { links: 4, smallerSide: 18 } }, [], firm],
  [
    'once weak, four crossing links are still weak',
    { cut: { links: 4, smallerSide: 18 } },
    ['few-links'],
    by('weak', 'few-links'),
  ],
  [
    'once weak, five crossing links are firm again',
    { cut: { links: 5, smallerSide: 18 } },
    ['few-links'],
    firm,
  ],
  [
    'a side of one node in ten is a weak place',
    { cut: { links: 2, smallerSide: 4 } },
    [],
    by('weak', 'few-links'),
  ],
  ['a smaller side is a loose end', { cut: { links: 2, smallerSide: 3 } }, [], firm],
  [
    'a single node is a loose end in the smallest overlay',
    { nodes: 4, cut: { links: 1, smallerSide: 1 } },
    [],
    firm,
  ],
  [
    'each rule keeps its own end: few links do not hold up the usual',
    { lambda2: 0.65, usual: 1, cut: { links: 4, smallerSide: 18 } },
    ['few-links'],
    by('weak', 'few-links'),
  ],
  ['a treat-as-split ends with its reason', {}, ['treat-as-split'], firm],
  ['before the first cut is counted, only λ₂ counts', { cut: null }, [], firm],
]

describe('the level', () => {
  it.each(table)('%s', (_, facts, inForce, expected) => {
    expect(levelOf({ ...calm, ...facts }, inForce)).toEqual(expected)
  })

  it('that is worse of two wins, and any level wins over none', () => {
    expect([worse('firm', 'weak'), worse('split', 'weak'), worse(null, 'firm'), worse(null, null)]).toEqual([
      'weak',
      'split',
      'firm',
      null,
    ])
  })
})
