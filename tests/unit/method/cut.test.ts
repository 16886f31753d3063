import { describe, expect, it } from 'vitest'
import { bestCut } from '@/lib/method/control/cut'
import { SUMS_SCALE } from '@/lib/method/report'

/** Agents that each count, per threshold, whether they are above and how many links of theirs cross. */
const heard = (counts: { above: number[]; crossing: number[] }[]) =>
  counts.map(({ above, crossing }) => ({
    last: {
      report: {
        sums: {
          attached: 1,
          sweep: { id: 7, above, crossing, crossingWeight: crossing.map((links) => links * SUMS_SCALE) },
        },
      },
    },
  })) as unknown as Parameters<typeof bestCut>[2]
const thresholds = [-1, 0, 1]

describe('the best of the counted cuts', () => {
  const above = [
    [0, 0, 0],
    [1, 0, 0],
    [1, 1, 0],
    [1, 1, 1],
  ]
  const evenest = { threshold: 0, sweep: 7, above: 2, below: 2 }
  it.each([
    [
      'has the least weight for each node of its smaller side',
      [
        [1, 0, 0],
        [1, 1, 0],
        [0, 1, 1],
        [0, 0, 1],
      ],
      { ...evenest, links: 1, weight: 1, clean: [] },
    ],
    [
      'is the evenest of several that nothing crosses, and all of those are told',
      [
        [0, 0, 0],
        [0, 0, 1],
        [0, 0, 1],
        [0, 0, 1],
      ],
      {
        ...evenest,
        links: 0,
        weight: 0,
        clean: [
          { threshold: -1, above: 3 },
          { threshold: 0, above: 2 },
        ],
      },
    ],
  ])('%s', (_, crossing, expected) => {
    const counts = above.map((each, index) => ({ above: each, crossing: crossing[index]! }))
    expect(bestCut(7, thresholds, heard(counts))).toEqual(expected)
  })

  it('is not known while not all have counted for this combination', () => {
    const counts = [{ above: [1, 1, 1], crossing: [0, 0, 0] }]
    expect(bestCut(8, thresholds, heard(counts))).toBeUndefined()
    expect(bestCut(7, thresholds, [])).toBeUndefined()
    expect(bestCut(7, thresholds, heard(counts))).toBeNull()
  })
})
