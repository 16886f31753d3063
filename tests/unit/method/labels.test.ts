import { describe, expect, it } from 'vitest'
import { explainSides, type SidedNode } from '@/lib/method/labels'
import {
  adjustedInformation,
  columnSums,
  entropy,
  expectedInformation,
  mutualInformation,
  rowSums,
  type Table,
} from '@/lib/method/labels/mutual-information'
import { permutationP, permutationsFor } from '@/lib/method/labels/permutation'
import { createRandom } from '@/lib/method/random'

const { LN2 } = Math
const expectedOf = (table: Table) => expectedInformation(rowSums(table), columnSums(table))

describe('adjusted mutual information', () => {
  /** Two and one of three on either side: ln 2 less the entropy of one in three. */
  const twoOfThree = (5 / 3) * LN2 - Math.log(3)
  // By hand: with margins 2,2 the corner is 0, 1, 2 with chances 1, 4, 1 in 6; with margins 3,3 it is 0 … 3 with 1, 9, 9, 1 in 20.
  it.each([
    [
      'all of one kind on one side',
      [
        [2, 0],
        [0, 2],
      ],
      LN2,
      LN2 / 3,
      1,
    ],
    [
      'as even as can be',
      [
        [1, 1],
        [1, 1],
      ],
      0,
      LN2 / 3,
      -1 / 2,
    ],
    [
      'two of three on either side',
      [
        [2, 1],
        [1, 2],
      ],
      twoOfThree,
      LN2 / 10 + 0.9 * twoOfThree,
      -1 / 9,
    ],
    [
      'one node of its own kind, on whichever side',
      [
        [3, 0],
        [2, 1],
      ],
      LN2 - (5 / 6) * entropy([3, 2]),
      LN2 - (5 / 6) * entropy([3, 2]),
      0,
    ],
  ] as [string, number[][], number, number, number][])(
    'of %s is as computed by hand',
    (_, table, information, expected, adjusted) => {
      expect(mutualInformation(table)).toBeCloseTo(information, 12)
      expect(expectedOf(table)).toBeCloseTo(expected, 12)
      expect(adjustedInformation(table)).toBeCloseTo(adjusted, 12)
    },
  )

  it('rests on the figures that scikit-learn tests against (sklearn/metrics/cluster/tests/test_supervised.py)', () => {
    // labels_a, labels_b of test_adjusted_mutual_info_score, counted.
    const table = [
      [5, 1, 0],
      [1, 4, 1],
      [0, 2, 3],
    ]
    expect(mutualInformation(table)).toBeCloseTo(0.41022, 5)
    expect(expectedOf(table)).toBeCloseTo(0.15042, 5)
    const arithmetic = (entropy(rowSums(table)) + entropy(columnSums(table))) / 2
    expect((0.41022 - 0.15042) / (arithmetic - 0.15042)).toBeCloseTo(0.27821, 4)
  })

  it('is 1 where each of several values lies wholly on one side', () => {
    expect(
      adjustedInformation([
        [9, 9, 0, 0],
        [0, 0, 9, 9],
      ]),
    ).toBeCloseTo(1, 12)
  })

  it('is the same whichever way round the table stands', () => {
    const table = [
      [7, 2, 4],
      [1, 6, 3],
    ]
    const turned = [0, 1, 2].map((column) => table.map((row) => row[column]!))
    expect(adjustedInformation(turned)).toBeCloseTo(adjustedInformation(table), 12)
  })

  it('holds for ten thousand nodes', () => {
    const table = [
      [2500, 2500],
      [2500, 2500],
    ]
    // A first-order expansion: (rows − 1)(columns − 1)/(2n), from memory.
    expect(expectedOf(table)).toBeCloseTo(1 / 20_000, 7)
  })
})

describe('the permutation test', () => {
  const test = (table: readonly [number, number][], permutations: number) => {
    const dealt = table.flatMap(([a, b], value) => [
      ...Array.from({ length: a }, () => ({ value, isB: false })),
      ...Array.from({ length: b }, () => ({ value, isB: true })),
    ])
    return permutationP(
      dealt.map(({ value }) => value),
      dealt.map(({ isB }) => isB),
      { random: createRandom('labels'), permutations },
    )
  }

  it('finds the chance that counting gives', () => {
    // Two of the twenty ways to deal three of six part them wholly: 0.1, and three deviations of 9,999 draws are 0.009.
    expect(
      Math.abs(
        test(
          [
            [3, 0],
            [0, 3],
          ],
          9_999,
        ) - 0.1,
      ),
    ).toBeLessThan(0.009)
    // Of the 70 ways to deal four of eight 34 part them three to one or more.
    expect(
      Math.abs(
        test(
          [
            [3, 1],
            [1, 3],
          ],
          9_999,
        ) -
          34 / 70,
      ),
    ).toBeLessThan(0.015)
  })

  it('is never 0, and 1 where nothing could say less', () => {
    expect(
      test(
        [
          [18, 0],
          [0, 18],
        ],
        999,
      ),
    ).toBe(1 / 1000)
    expect(
      test(
        [
          [2, 2],
          [2, 2],
        ],
        99,
      ),
    ).toBe(1)
  })

  it('draws less often for large overlays', () => {
    expect([36, 1000, 2000, 10_000].map(permutationsFor)).toEqual([999, 999, 500, 199])
  })
})

describe('what a cut follows', () => {
  const offices = ['Tarnwick', 'Gullhythe', 'Pinnet Bay', 'Eelholm']
  /** Nine nodes in each office, the cut between the first two and the others. */
  const nodes = (labels: (index: number) => Record<string, string>): SidedNode[] =>
    Array.from({ length: 36 }, (_, index) => ({
      side: index < 18 ? ('a' as const) : ('b' as const),
      labels: labels(index),
    }))
  const explain = (labels: (index: number) => Record<string, string>) =>
    explainSides(nodes(labels), { random: createRandom('sides') })

  it('is told best first, and of what says as much the key with fewer values', () => {
    const { labels, leftOut } = explain((index) => ({
      office: offices[Math.floor(index / 9)]!,
      shore: index < 18 ? 'north' : 'south',
      parity: index % 2 === 0 ? 'even' : 'odd',
      power: index < 16 ? 'grid one' : 'grid two',
    }))
    expect(labels.map(({ key }) => key)).toEqual(['shore', 'office', 'power', 'parity'])
    expect(labels[1]).toMatchObject({
      values: 4,
      labelled: 36,
      unlabelled: 0,
      p: 0.001,
      permutations: 999,
      exactly: { a: ['Gullhythe', 'Tarnwick'], b: ['Eelholm', 'Pinnet Bay'] },
    })
    expect(labels[0]!.adjusted).toBeCloseTo(1, 9)
    expect(labels[2]).toMatchObject({ exactly: null, p: 0.001 })
    expect(labels[2]!.adjusted).toBeGreaterThan(0.6)
    expect(labels[2]!.adjusted).toBeLessThan(1)
    expect(Math.abs(labels[3]!.adjusted)).toBeLessThan(0.05)
    expect(labels[3]!.p).toBeGreaterThan(0.5)
    expect(leftOut).toEqual([])
  })

  it('leaves out keys that name nodes, have one value, or stand on one side only, and says so', () => {
    const { labels, leftOut } = explain((index) => ({
      host: `host-${index}`,
      region: 'Harbourline',
      ...(index < 6 && { berth: index < 3 ? 'inner' : 'outer' }),
      ...(index < 3 && { spare: 'yes' }),
    }))
    expect(labels).toEqual([])
    expect(leftOut).toEqual([
      { key: 'berth', values: 2, labelled: 6, because: 'one-side' },
      { key: 'host', values: 36, labelled: 36, because: 'nearly-unique' },
      { key: 'region', values: 1, labelled: 36, because: 'one-value' },
      { key: 'spare', values: 1, labelled: 3, because: 'one-value' },
    ])
  })

  it('counts the nodes without the label apart', () => {
    const { labels } = explain(
      (index): Record<string, string> => (index % 3 === 0 ? {} : { office: offices[Math.floor(index / 9)]! }),
    )
    expect(labels).toEqual([expect.objectContaining({ labelled: 24, unlabelled: 12 })])
    expect(labels[0]!.adjusted).toBeCloseTo(1, 9)
  })

  it('says nothing of no nodes', () => {
    expect(explainSides([], { random: createRandom(1) })).toEqual({ labels: [], leftOut: [] })
  })
})
