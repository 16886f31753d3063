import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import type { ReadingPoint } from '@/lib/data/dto'
import {
  type MomentEvent,
  placeEvents,
  scaleTop,
  spansWhere,
  trendColumns,
  trendSummary,
} from '@/lib/face/trend'

const start = Date.parse('2031-03-12T09:00:00.000Z') / 1000

function point(second: number, lambda2: number | null, demo = false): ReadingPoint {
  return {
    at: new Date((start + second) * 1000).toISOString(),
    lambda2,
    low: lambda2 === null ? null : lambda2 * 0.9,
    high: lambda2 === null ? null : lambda2 * 1.1,
    level: 'firm',
    data: lambda2 === null ? 'unheard' : 'fresh',
    demo,
  }
}

const space = { fromSeconds: 0, toSeconds: 3600, left: 58, right: 900, rows: 3, charPx: 7 }
const event = (atSeconds: number, text: string): MomentEvent => ({
  id: `${atSeconds}-${text}`,
  atSeconds,
  text,
})

describe('trend', () => {
  it('breaks the line where nothing was stored, and where a reading was withheld', () => {
    const columns = trendColumns([point(0, 1), point(30, 2), point(300, 3), point(330, null)], 30)
    expect(columns.x.map((x) => x - start)).toEqual([0, 30, 60, 300, 330])
    expect(columns.reading).toEqual([1, 2, null, 3, null])
  })

  it('leaves out what settles after a break, and keeps what settles after a change', () => {
    const settling = (second: number, lambda2: number): ReadingPoint => ({
      ...point(second, lambda2),
      data: 'settling',
    })
    const points = [settling(0, 9), settling(30, 4), point(60, 2), settling(90, 1.5), point(120, 1)]
    expect(trendColumns(points, 30).reading).toEqual([null, null, 2, 1.5, 1])
    const withheld = [point(0, 2), point(30, null), settling(60, 7), point(90, 2)]
    expect(trendColumns(withheld, 30).reading).toEqual([2, null, null, 2])
  })

  it('puts points into order', () => {
    expect(trendColumns([point(30, 2), point(0, 1)], 30).reading).toEqual([1, 2])
  })

  it('shades from the first withheld point to the next good one, and to the end while it lasts', () => {
    const points = [point(0, 1), point(30, null), point(60, null), point(90, 1), point(120, null)]
    const spans = spansWhere(points, (p) => p.data === 'unheard', 30, start + 500)
    expect(spans.map((s) => [s.from - start, s.to - start])).toEqual([
      [30, 90],
      [120, 500],
    ])
  })

  it('does not shade over a long silence of the collector itself', () => {
    const points = [point(0, null), point(10_000, 1)]
    expect(spansWhere(points, (p) => p.data === 'unheard', 30, start + 20_000)).toEqual([
      { from: start, to: start + 105 },
    ])
  })

  it('makes room for the band and the usual, and never for nothing', () => {
    expect(scaleTop(trendColumns([point(0, 1)], 30), [2])).toBeCloseTo(2.24)
    expect(scaleTop(trendColumns([point(0, 1)], 30), [null])).toBeCloseTo(1.232)
    expect(scaleTop(trendColumns([point(0, 0)], 30), [])).toBe(1)
    expect(scaleTop(trendColumns([], 30), [])).toBe(1)
  })

  it('says the chart in words', () => {
    const points = [point(0, 0.66, true), point(30, 0.24)]
    expect(trendSummary(points, '3 h', [{ from: 0, to: 1 }], 0.5)).toBe(
      'Trend over the last 3 h: from 0.660 to 0.240, lowest 0.240, highest 0.660. Usual: 0.500. Withheld once. The earlier part is demo history, computed by simulation.',
    )
    expect(trendSummary([], '3 h', [], null)).toBe('No readings in the last 3 h.')
  })
})

describe('events below the axis', () => {
  it('writes each where it happened', () => {
    const marks = placeEvents([event(900, 'pin-04 joined'), event(1800, 'gul-03 – pin-02 lost')], space)
    expect(marks.map((m) => [Math.round(m.x), m.row, m.text])).toEqual([
      [269, 0, 'pin-04 joined'],
      [479, 0, 'gul-03 – pin-02 lost'],
    ])
  })

  it('counts what is too near to be told apart', () => {
    const marks = placeEvents([event(100, 'a'), event(110, 'b'), event(120, 'c')], space)
    expect(marks.map((m) => m.text)).toEqual(['3 events'])
  })

  it('turns words to the left at the right edge', () => {
    const [mark] = placeEvents([event(3590, 'a link was lost')], space)
    expect(mark?.anchor).toBe('end')
  })

  it('leaves out what lies outside', () => {
    expect(placeEvents([event(-5, 'before'), event(4000, 'after')], space)).toEqual([])
  })

  it('never lets words overlap in a row, nor leave the drawing, and loses no event to another', () => {
    const events = fc.array(
      fc.record({ at: fc.integer({ min: 0, max: 3600 }), text: fc.string({ minLength: 1, maxLength: 60 }) }),
      { maxLength: 60 },
    )
    fc.assert(
      fc.property(events, fc.integer({ min: 200, max: 1200 }), (given, right) => {
        const list = given.map((e, i) => ({ id: String(i), atSeconds: e.at, text: e.text }))
        const marks = placeEvents(list, { ...space, right })
        for (const [i, p] of marks.entries()) {
          expect(p.from).toBeGreaterThanOrEqual(0)
          expect(p.to).toBeLessThanOrEqual(right + 6)
          for (const q of marks.slice(i + 1)) {
            if (p.row === q.row) expect(p.to <= q.from || q.to <= p.from).toBe(true)
          }
        }
        const told = marks.map((m) => Number(/^(\d+) events?$/.exec(m.text)?.[1] ?? 1))
        expect(told.reduce((sum, n) => sum + n, 0)).toBe(list.length)
      }),
      { numRuns: 200 },
    )
  })
})
