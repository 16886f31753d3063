import { describe, expect, it } from 'vitest'
import { isInWindow, nextWindows } from '@/lib/warn/window'

const at = Date.parse
const said = (spans: { startsAtMs: number; endsAtMs: number }[]) =>
  spans.map(({ startsAtMs, endsAtMs }) => [
    new Date(startsAtMs).toISOString().slice(0, 16),
    new Date(endsAtMs).toISOString().slice(0, 16),
  ])
const once = {
  startsAtMs: at('2026-12-09T22:00Z'),
  endsAtMs: at('2026-12-09T23:00Z'),
  repeats: null,
  endedAtMs: null,
}

describe('a maintenance window', () => {
  it.each([
    ['2026-12-09T21:59:59Z', false],
    ['2026-12-09T22:00:00Z', true],
    ['2026-12-09T22:59:59Z', true],
    ['2026-12-09T23:00:00Z', false],
  ])('from 22:00 to 23:00 holds at %s: %s', (moment, holds) =>
    expect(isInWindow(once, at(moment))).toBe(holds),
  )

  it('that is ended by hand is over, and does not come back', () => {
    const repeats = { weekdays: [3], zone: 'UTC', until: null }
    const ended = { ...once, repeats, endedAtMs: at('2026-12-09T22:10Z') }
    expect(isInWindow(ended, at('2026-12-09T22:09Z'))).toBe(true)
    expect(isInWindow(ended, at('2026-12-09T22:10Z'))).toBe(false)
    expect(nextWindows(ended, at('2026-12-09T22:10Z'), 3)).toEqual([])
  })

  // IANA tz database, Europe/London: clocks went forward on 29 March 2026, 01:00 to 02:00, and back on 25 October, 02:00 to 01:00.
  it('keeps its time of day over a change of clocks, and its length', () => {
    const nightly = {
      startsAtMs: at('2026-03-27T01:30Z'),
      endsAtMs: at('2026-03-27T02:30Z'),
      repeats: { weekdays: [1, 2, 3, 4, 5, 6, 7], zone: 'Europe/London', until: '2026-03-30' },
      endedAtMs: null,
    }
    expect(said(nextWindows(nightly, at('2026-03-27T02:30Z'), 9))).toEqual([
      ['2026-03-28T01:30', '2026-03-28T02:30'],
      // 01:30 does not exist: as much later as clocks go forward, 02:30.
      ['2026-03-29T01:30', '2026-03-29T02:30'],
      ['2026-03-30T00:30', '2026-03-30T01:30'],
    ])
  })

  it('that begins at a time that comes twice begins at the first', () => {
    const weekly = {
      startsAtMs: at('2026-10-18T00:30Z'),
      endsAtMs: at('2026-10-18T02:30Z'),
      repeats: { weekdays: [7], zone: 'Europe/London', until: null },
      endedAtMs: null,
    }
    expect(said(nextWindows(weekly, at('2026-10-19T00:00Z'), 2))).toEqual([
      ['2026-10-25T00:30', '2026-10-25T02:30'],
      ['2026-11-01T01:30', '2026-11-01T03:30'],
    ])
  })

  it('over midnight is of the day on which it begins', () => {
    const late = {
      startsAtMs: at('2026-12-01T23:00Z'),
      endsAtMs: at('2026-12-02T02:00Z'),
      repeats: { weekdays: [2], zone: 'UTC', until: null },
      endedAtMs: null,
    }
    expect(isInWindow(late, at('2026-12-09T01:59Z'))).toBe(true)
    expect(isInWindow(late, at('2026-12-10T01:00Z'))).toBe(false)
  })
})
