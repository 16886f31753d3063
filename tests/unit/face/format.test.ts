import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import {
  formatAtMostWithout,
  formatCount,
  formatHigh,
  formatInterval,
  formatLow,
  formatReading,
  formatShare,
  formatValue,
} from '@/lib/face/format'
import { formatDuration, formatMoment, formatRelative } from '@/lib/face/time'

const number = (text: string) => Number(text.replace('−', '-'))

describe('numbers', () => {
  it('shows readings with at least three significant figures', () => {
    const shown = [2.24612, 0.23781, 0.0123456, 0.000123456, 12.3456, 123.456, 1234.5, 0].map(formatReading)
    expect(shown).toEqual(['2.246', '0.238', '0.0123', '0.000123', '12.35', '123.5', '1235', '0.000'])
  })

  it('rounds bounds outward, always', () => {
    const positive = fc.double({ min: 1e-6, max: 1e4, noNaN: true })
    fc.assert(
      fc.property(positive, positive, (p, q) => {
        const [low, high] = p < q ? [p, q] : [q, p]
        expect(number(formatLow(low))).toBeLessThanOrEqual(low)
        expect(number(formatHigh(high))).toBeGreaterThanOrEqual(high)
        const [shownLow, shownHigh] = formatInterval(low, high).split('–').map(number)
        expect(shownLow).toBeLessThanOrEqual(low)
        expect(shownHigh).toBeGreaterThanOrEqual(high)
      }),
    )
  })

  it('does not widen a bound that needs no rounding', () => {
    expect(formatInterval(0.231, 0.29, 0.238)).toBe('0.231–0.290')
    expect(formatInterval(0.23141, 0.24438, 0.238)).toBe('0.231–0.245')
  })

  it('rounds the bound on what is left without a link up', () => {
    expect(formatAtMostWithout(0.238, 0.3)).toBe('0.167')
    fc.assert(
      fc.property(
        fc.double({ min: 1e-3, max: 10, noNaN: true }),
        fc.double({ min: 0, max: 1, noNaN: true }),
        (l, s) => {
          expect(number(formatAtMostWithout(l, s))).toBeGreaterThanOrEqual(l * (1 - s))
        },
      ),
    )
  })

  it('never calls a small share nothing', () => {
    expect([0.3, 0.0049, 0, 1].map(formatShare)).toEqual(['30\u202f%', '<1\u202f%', '0\u202f%', '100\u202f%'])
  })

  it('counts in words that agree', () => {
    expect([formatCount(1, 'link'), formatCount(3, 'link'), formatCount(2, 'entry', 'entries')]).toEqual([
      '1 link',
      '3 links',
      '2 entries',
    ])
  })

  it('writes a true minus, and none before nothing', () => {
    expect([formatValue(-0.424), formatValue(0.5), formatValue(-0.001)]).toEqual(['−0.42', '0.50', '0.00'])
  })
})

describe('times', () => {
  const now = Date.parse('2031-03-12T11:46:30Z')
  const zone = { timeZone: 'UTC' }

  it('gives ages in the largest whole unit', () => {
    const ages = [0, 400, 12_000, 119_000, 3 * 3600_000, 49 * 3600_000].map((ms) =>
      formatRelative(now - ms, now),
    )
    expect(ages).toEqual(['now', 'now', '12 s ago', '1 min ago', '3 h ago', '2 d ago'])
    expect(formatRelative(now + 90_000, now)).toBe('in 1 min')
    expect(formatDuration(0)).toBe('0 s')
  })

  it('adds the day, and the year, only where they differ', () => {
    const at = (iso: string) => formatMoment(Date.parse(iso), now, zone)
    expect(at('2031-03-12T09:05:00Z')).toBe('09:05')
    expect(at('2031-03-11T23:59:00Z')).toBe('11 Mar 23:59')
    expect(at('2030-12-31T00:00:00Z')).toBe('31 Dec 2030 00:00')
  })

  it('uses the zone it is given across a change of clocks', () => {
    const berlin = { timeZone: 'Europe/Berlin' }
    expect(formatMoment(Date.parse('2031-03-30T00:59:00Z'), Date.parse('2031-03-30T12:00:00Z'), berlin)).toBe(
      '01:59',
    )
    expect(formatMoment(Date.parse('2031-03-30T01:00:00Z'), Date.parse('2031-03-30T12:00:00Z'), berlin)).toBe(
      '03:00',
    )
  })
})
