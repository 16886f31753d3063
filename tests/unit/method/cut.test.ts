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

  describe('and the next best that parts the nodes otherwise', () => {
    /** Three groups in a row along the values, `between` links from one to the next, none that reaches further. */
    const three = ([first, second, third]: number[], between: number[]) => {
      const group = [first!, second!, third!].flatMap((nodes, place) =>
        Array.from({ length: nodes }, () => place),
      )
      const counts = group.map((place, index) => {
        const isFirst = group.indexOf(place) === index
        // Between the groups their first nodes hold the links; within a group thresholds cut much more.
        const at = (border: number) =>
          isFirst && (place === border || place === border + 1) ? between[border]! : 0
        return { above: [place > 0, place > 0, place > 1].map(Number), crossing: [at(0), at(0), at(1)] }
      })
      // The middle threshold halves the second group.
      const half = first! + Math.floor(second! / 2)
      for (const [index, count] of counts.entries()) {
        count.above[1] = index >= half ? 1 : 0
        count.crossing[1] = group[index] === 1 ? 3 : 0
      }
      return heard(counts)
    }

    it.each([
      ['is told where it stands out', [12, 12, 12], [1, 3], { above: 12, below: 24, links: 3, weight: 3 }],
      [
        'is told whichever of them is the best',
        [12, 12, 12],
        [4, 1],
        { above: 24, below: 12, links: 4, weight: 4 },
      ],
      ['is not told where it would part off fewer than five', [20, 12, 4], [1, 3], undefined],
      ['is not told where it is the slope of the best', [12, 12, 12], [1, 40], undefined],
      ['is not told once the overlay has come apart', [12, 12, 12], [0, 3], undefined],
    ] as [string, number[], number[], object | undefined][])('%s', (_, groups, between, expected) => {
      const runnerUp = bestCut(7, thresholds, three(groups, between))!.runnerUp
      if (expected) expect(runnerUp).toMatchObject(expected)
      else expect(runnerUp).toBeUndefined()
    })
  })
})
