import { describe, expect, it } from 'vitest'
import { cutoffOf, endOf, partitionsAround } from '@/lib/db/partitions'
import { SERIES } from '@/lib/db/series'
import { MINUTE_RESTS_MS } from '@/lib/jobs/roll-up'
import { chunksOf, stretchDue, TAKEN_ANEW_MS } from '@/lib/jobs/stretch'
import { TASKS } from '@/lib/jobs/tasks'

const series = {
  table: 'tides',
  width: 'month',
  keepDays: 90,
  back: 0,
  ahead: 1,
  rolledInto: 'hours',
  uncounted: [],
} as const

describe('partitions', () => {
  it('are days, months and years in UTC, across the turn of a year', () => {
    const now = new Date('2026-12-31T23:59:59Z')
    expect(partitionsAround({ ...series, width: 'day' }, now)).toEqual([
      { name: 'tides_2026_12_31', from: '2026-12-31T00:00:00.000Z', to: '2027-01-01T00:00:00.000Z' },
      { name: 'tides_2027_01_01', from: '2027-01-01T00:00:00.000Z', to: '2027-01-02T00:00:00.000Z' },
    ])
    expect(partitionsAround(series, now)).toEqual([
      { name: 'tides_2026_12', from: '2026-12-01T00:00:00.000Z', to: '2027-01-01T00:00:00.000Z' },
      { name: 'tides_2027_01', from: '2027-01-01T00:00:00.000Z', to: '2027-02-01T00:00:00.000Z' },
    ])
    expect(partitionsAround({ ...series, width: 'year', keepDays: 800, back: 1, ahead: 0 }, now)).toEqual([
      { name: 'tides_2025', from: '2025-01-01T00:00:00.000Z', to: '2026-01-01T00:00:00.000Z' },
      { name: 'tides_2026', from: '2026-01-01T00:00:00.000Z', to: '2027-01-01T00:00:00.000Z' },
    ])
  })

  it('are not made where they would go at once', () => {
    const now = new Date('2026-12-31T00:00:00Z')
    const names = partitionsAround({ ...series, back: 3, ahead: 0 }, now).map(({ name }) => name)
    expect(names).toEqual(['tides_2026_10', 'tides_2026_11', 'tides_2026_12'])
    for (const one of SERIES)
      for (const { to } of partitionsAround(one, now))
        expect(new Date(to) > cutoffOf({ ...one, rolledInto: null }, now, null)).toBe(true)
  })

  it('say by their names when they end, as they were made; the default one has no end', () => {
    const now = new Date('2028-02-29T12:00:00Z')
    for (const one of SERIES)
      for (const { name, to } of partitionsAround(one, now)) expect(endOf(one, name)).toEqual(new Date(to))
    expect(endOf(series, 'tides_default')).toBeNull()
    expect(endOf(series, 'tides')).toBeNull()
  })

  it('go when they have been kept long enough, and not before what is kept longer has taken them over', () => {
    const now = new Date('2026-12-31T00:00:00Z')
    const through = (text: string) => new Date(text)
    expect(cutoffOf(series, now, through('2026-12-30T00:00:00Z'))).toEqual(through('2026-10-02T00:00:00Z'))
    expect(cutoffOf(series, now, through('2026-08-01T00:00:00Z'))).toEqual(through('2026-08-01T00:00:00Z'))
    expect(cutoffOf(series, now, null)).toEqual(new Date(0))
    expect(cutoffOf({ ...series, rolledInto: null }, now, null)).toEqual(through('2026-10-02T00:00:00Z'))
  })

  it('are as wide as what one drop may take with it: less than what is kept', () => {
    const days = { day: 1, month: 31, year: 366 }
    for (const { table, keepDays, width } of SERIES)
      expect([table, keepDays > days[width]]).toEqual([table, true])
  })
})

describe('taking over', () => {
  const at = (text: string) => Date.parse(`2026-12-01T${text}Z`)

  it('takes whole minutes at rest, and the last ones anew', () => {
    const rested = at('12:07:31') - MINUTE_RESTS_MS
    expect(stretchDue(at('12:00:00'), rested, 60_000)).toEqual({
      fromMs: at('12:00:00') - TAKEN_ANEW_MS,
      toMs: at('12:07:00'),
    })
    expect(stretchDue(at('12:07:00'), rested, 60_000)).toBeNull()
  })

  it('takes an hour once all its minutes are there', () => {
    expect(stretchDue(at('12:00:00'), at('12:59:00'), 3_600_000)).toBeNull()
    expect(stretchDue(at('12:00:00'), at('13:00:00'), 3_600_000)).toEqual({
      fromMs: at('11:00:00'),
      toMs: at('13:00:00'),
    })
  })

  it('cuts what is long at days', () => {
    const stretch = { fromMs: Date.UTC(2026, 10, 30, 22), toMs: Date.UTC(2026, 11, 2, 3) }
    const chunks = chunksOf(stretch)
    expect(chunks.map(({ fromMs }) => new Date(fromMs).toISOString())).toEqual([
      '2026-11-30T22:00:00.000Z',
      '2026-12-01T00:00:00.000Z',
      '2026-12-02T00:00:00.000Z',
    ])
    expect(chunks.at(-1)?.toMs).toBe(stretch.toMs)
    expect(chunksOf({ fromMs: 5, toMs: 5 })).toEqual([])
  })
})

it('every job has a name of its own', () => {
  expect(new Set(TASKS.map(({ name }) => name)).size).toBe(TASKS.length)
})
