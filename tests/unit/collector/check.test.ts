import { describe, expect, it } from 'vitest'
import { APART_INTERVALS, checkNow, checkText } from '@/lib/collector/check'
import type { Estimate } from '@/lib/method/control'

const INTERVAL_MS = 2_000
const at = (atMs: number, crossCheck: number | null, over: Partial<Estimate> = {}): Estimate =>
  ({ atMs, lambda2: 2, crossCheck, settling: false, ...over }) as Estimate
const now = (estimate: Estimate, apartSinceMs: number | null = null, isSplit = false) =>
  checkNow({ apartSinceMs }, estimate, { isSplit, intervalMs: INTERVAL_MS })
const LONG_MS = APART_INTERVALS * INTERVAL_MS

describe('the same-walker check', () => {
  it.each([
    ['agrees within its tolerance', at(5_000, 2.59), 1_000, { apartSinceMs: null, check: 'agrees' }],
    [
      'is unsure when they first stand apart',
      at(5_000, 2.61),
      null,
      { apartSinceMs: 5_000, check: 'unsure' },
    ],
    ['is unsure while that is short', at(LONG_MS, 0.9), 1, { apartSinceMs: 1, check: 'unsure' }],
    ['is apart once it has lasted', at(LONG_MS + 1, 0.9), 1, { apartSinceMs: 1, check: 'apart' }],
    [
      'starts over while the reading settles',
      at(LONG_MS + 1, 0.9, { settling: true }),
      1,
      { apartSinceMs: null, check: 'unsure' },
    ],
    ['compares nothing without a check', at(LONG_MS, null), 1, { apartSinceMs: null, check: null }],
    [
      'compares nothing without a reading',
      at(LONG_MS, 1, { lambda2: null }),
      1,
      { apartSinceMs: null, check: null },
    ],
  ] as const)('%s', (_, estimate, since, expected) => {
    expect(now(estimate, since)).toEqual(expected)
  })

  it('says nothing of a split overlay: both are noise about zero', () => {
    expect(now(at(LONG_MS + 1, 0.01, { lambda2: 0.002 }), 1, true)).toEqual({
      apartSinceMs: null,
      check: null,
    })
  })

  it('says what to do, and only when it is apart', () => {
    expect([checkText('agrees', 0), checkText('unsure', 0), checkText(null, 0)]).toEqual(['', '', ''])
    expect(checkText('apart', 0)).toMatch(/do not rely on either until they agree\. Look on Nodes/)
    expect(checkText('apart', 1)).toMatch(/left out already/)
  })
})
