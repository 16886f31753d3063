import { describe, expect, it } from 'vitest'
import { planRange, READINGS_MOST, sourcesOf } from '@/lib/data/readings-range'

const nowMs = Date.parse('2026-12-31T12:00:00Z')
const hourMs = 3_600_000
const plan = (lastHours: number, stepSeconds: number | null, backHours = 0) => {
  const toMs = nowMs - backHours * hourMs
  const asked = { toMs, fromMs: toMs - lastHours * hourMs, stepSeconds, intervalMs: 2_000, nowMs }
  const { kept, stepSeconds: step } = planRange(asked)
  return `${kept} ${step}`
}

describe('a range of readings is made from', () => {
  it('the coarsest that still has steps as fine as asked for', () => {
    expect(plan(0.25, 2)).toBe('reading 2')
    expect(plan(3, 30)).toBe('reading 30')
    expect(plan(24, 240)).toBe('minute 240')
    expect(plan(7 * 24, 1_800)).toBe('minute 1800')
    expect(plan(30 * 24, 7_200)).toBe('hour 7200')
    expect(plan(365 * 24, 86_400)).toBe('hour 86400')
  })

  it('as many points as there may be, where no step is asked for or one too fine, in whole parts', () => {
    expect(plan(0.25, null)).toBe('reading 2')
    expect(plan(1, 0.2)).toBe('reading 4')
    expect(plan(24, null)).toBe('minute 120')
    expect(plan(365 * 24, 1)).toBe('hour 32400')
    for (const hours of [0.1, 1, 5, 24, 100, 1_000, 10_000, 40_000]) {
      const step = Number(plan(hours, null).split(' ')[1])
      expect((hours * 3_600) / step + 1).toBeLessThanOrEqual(READINGS_MOST)
    }
  })

  it('no more rows than can be looked at quickly, though steps get coarser', () => {
    expect(plan(4, 30)).toBe('minute 60')
    expect(plan(10 * 24, 900)).toBe('hour 3600')
  })

  it('what reaches back so far, however fine a step is asked for', () => {
    expect(plan(1, 2, 6 * 24)).toBe('reading 4')
    expect(plan(1, 2, 8 * 24)).toBe('minute 60')
    expect(plan(1, 2, 91 * 24)).toBe('hour 3600')
    expect(plan(1, 90, 8 * 24)).toBe('minute 120')
    expect(plan(1, 2, 50 * 366 * 24)).toBe('hour 3600')
  })
})

describe('hours end where they have been taken over, and', () => {
  const at = (text: string) => Date.parse(`2026-12-31T${text}Z`)
  const told = (sources: ReturnType<typeof sourcesOf>) =>
    sources.map(({ kept, fromMs, toMs }) =>
      [kept, ...[fromMs, toMs].map((ms) => new Date(ms).toISOString().slice(11, 19))].join(' '),
    )

  it('minutes and readings make up the rest', () => {
    const range = { kept: 'hour' as const, fromMs: at('08:20:00'), toMs: nowMs }
    const through = { hour: at('11:00:00'), minute: at('11:58:00') }
    expect(told(sourcesOf(range, through))).toEqual([
      'hour 08:00:00 11:00:00',
      'minute 11:00:00 11:58:00',
      'reading 11:58:00 12:00:00',
    ])
    expect(told(sourcesOf({ ...range, kept: 'minute' }, through))).toEqual([
      'minute 08:20:00 11:58:00',
      'reading 11:58:00 12:00:00',
    ])
  })

  it('nothing else is looked at where they reach the end, and only readings where nothing was taken over', () => {
    const range = { kept: 'hour' as const, fromMs: at('08:20:00'), toMs: at('10:10:00') }
    expect(told(sourcesOf(range, { hour: at('11:00:00'), minute: at('11:58:00') }))).toEqual([
      'hour 08:00:00 10:10:00',
    ])
    expect(told(sourcesOf(range, { hour: null, minute: null }))).toEqual(['reading 08:00:00 10:10:00'])
    expect(told(sourcesOf(range, { hour: at('07:00:00'), minute: at('07:10:00') }))).toEqual([
      'reading 08:00:00 10:10:00',
    ])
  })
})
