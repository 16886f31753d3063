import { describe, expect, it } from 'vitest'
import { TimeDebt } from '@/lib/method/node/time-debt'

const TICK_MS = 200

function walked(gapsMs: readonly number[]): number[] {
  const debt = new TimeDebt()
  let nowMs = 0
  debt.due(nowMs, TICK_MS)
  return gapsMs.map((gapMs) => {
    nowMs += gapMs
    return debt.due(nowMs, TICK_MS)
  })
}

describe('time to walk', () => {
  it.each([
    ['is the time since the last tick', [200, 180, 220], [200, 180, 220]],
    ['is made up for by an agent at a third of its rate', [600, 600, 600], [600, 600, 600]],
    ['comes at most four ticks at once, the rest later', [1_200, 200, 200, 200], [800, 600, 200, 200]],
    ['is dropped after a stall, but for one tick', [15_000, 200, 200], [200, 200, 200]],
    ['is dropped with what was owed before a stall', [1_900, 15_000, 200], [800, 200, 200]],
    ['is one tick when the clock steps back', [200, -5_000, 200], [200, 200, 200]],
  ])('%s', (_, gaps, expected) => {
    expect(walked(gaps)).toEqual(expected)
  })

  it('is not owed for frozen time', () => {
    const debt = new TimeDebt()
    debt.due(0, TICK_MS)
    debt.drop(1_500)
    expect(debt.due(1_700, TICK_MS)).toBe(200)
  })
})
