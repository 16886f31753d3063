import { describe, expect, test } from 'vitest'
import type { CollectorError } from '@/agent'
import { attemptLimitMs, waitAfter } from '@/agent/collector/report-plan'

const intervalMs = 2_000
const refused = (retry: boolean): CollectorError => ({
  code: 'refused',
  problem: { status: 503, title: '', detail: '', code: 'busy', retry },
})
const away: CollectorError = { code: 'unreachable', reason: 'ECONNREFUSED' }

describe('from one report to the next', () => {
  test.each<[string, CollectorError | null, number, number, number]>([
    ['one interval, spread by a tenth either way', null, 0, 1_800, 2_200],
    ['within one interval while the collector is away, however long', away, 300, 1_600, 2_000],
    [
      'so too behind a proxy that answers for it',
      { code: 'bad-reply', status: 502, issue: '' },
      9,
      1_600,
      2_000,
    ],
    ['an interval after one that asks for patience', refused(true), 1, 1_600, 2_000],
    ['four intervals once it has asked often', refused(true), 9, 7_600, 8_000],
    ['a minute where trying again does not help', refused(false), 1, 60_000, 60_000],
  ])('%s', (_, error, failedInARow, least, most) => {
    const waits = [0, 0.5, 1].map((uniform) => waitAfter(error, { failedInARow, intervalMs, uniform }))
    expect([Math.min(...waits), Math.max(...waits)]).toEqual([least, most])
  })
})

test.each<[string, number, number | null]>([
  ['as long as any at first', 0, null],
  ['as long as any after one failure', 1, null],
  ['an interval while the collector is away', 2, 2_000],
  ['as long as any every fifth time: it may only be slow', 5, null],
])('an attempt may take %s', (_, failedInARow, expected) => {
  expect(attemptLimitMs(failedInARow, intervalMs)).toBe(expected)
})
