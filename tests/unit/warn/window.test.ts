import { describe, expect, it } from 'vitest'
import { isInWindow, nextWindows, type WindowTimes } from '@/lib/warn/window'

const ms = (text: string) => Date.parse(text)
const once: WindowTimes = {
  startsAtMs: ms('2026-03-24T22:00:00Z'),
  endsAtMs: ms('2026-03-25T00:00:00Z'),
  repeats: null,
  endedAtMs: null,
}
/** 23:00 to 01:00 in Berlin, Tuesdays and Sundays; clocks go forward on 29 March 2026 at 01:00 UTC. */
const weekly: WindowTimes = {
  ...once,
  repeats: { weekdays: [2, 7], zone: 'Europe/Berlin', until: '2026-04-05' },
}

describe('a maintenance window', () => {
  it.each<[string, WindowTimes, string, boolean]>([
    ['has not begun a moment before', once, '2026-03-24T21:59:59.999Z', false],
    ['begins with its first moment', once, '2026-03-24T22:00:00Z', true],
    ['is over at its end', once, '2026-03-25T00:00:00Z', false],
    ['does not repeat unless said', once, '2026-03-31T22:00:00Z', false],
    [
      'repeats on its other weekday',
      { ...weekly, startsAtMs: once.startsAtMs },
      '2026-03-29T21:00:00Z',
      true,
    ],
    ['begins an hour earlier by UTC in summer', weekly, '2026-03-31T21:00:00Z', true],
    ['ends an hour earlier by UTC in summer', weekly, '2026-03-31T23:00:00Z', false],
    ['reaches over midnight', weekly, '2026-03-31T22:59:59Z', true],
    ['is not on other days', weekly, '2026-04-01T21:30:00Z', false],
    ['still is on its last day', weekly, '2026-04-05T21:30:00Z', true],
    ['is no more after its last day', weekly, '2026-04-07T21:30:00Z', false],
    [
      'ends by hand, with all that were to come',
      { ...weekly, endedAtMs: ms('2026-03-30T00:00:00Z') },
      '2026-03-31T21:30:00Z',
      false,
    ],
  ])('%s', (_, window, at, expected) => {
    expect(isInWindow(window, ms(at))).toBe(expected)
  })

  it('tells those to come, each as long as the first', () => {
    const next = nextWindows(weekly, ms('2026-03-28T00:00:00Z'), 2)
    expect(
      next.map(({ startsAtMs, endsAtMs }) => [
        new Date(startsAtMs).toISOString(),
        new Date(endsAtMs).toISOString(),
      ]),
    ).toEqual([
      ['2026-03-29T21:00:00.000Z', '2026-03-29T23:00:00.000Z'],
      ['2026-03-31T21:00:00.000Z', '2026-03-31T23:00:00.000Z'],
    ])
  })
})
