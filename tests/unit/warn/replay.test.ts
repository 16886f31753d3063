import { describe, expect, it } from 'vitest'
import type { WarnFacts } from '@/lib/warn/facts'
import { type ReplayedRule, replay } from '@/lib/warn/replay'

const MINUTE_MS = 60_000
const FIRM: WarnFacts = {
  atMs: 0,
  isFresh: true,
  lambda2: 1,
  usual: 1,
  level: 'firm',
  treatAsSplit: false,
  crossingLinks: null,
  smallerSide: null,
  joined: 12,
  heard: 12,
  linksKnown: 30,
  linksMeasured: 30,
  check: null,
  leftOut: 0,
}
const TIMING = { onDelaySeconds: 120, clearMarginPercent: 15, offDelaySeconds: 180 }
const FLOOR: ReplayedRule = { settings: { kind: 'floor', floor: { of: 'usual', percent: 60 } }, ...TIMING }

/** One a minute. */
const minutes = (facts: readonly Partial<WarnFacts>[]): WarnFacts[] =>
  facts.map((one, minute) => ({ ...FIRM, atMs: minute * MINUTE_MS, ...one }))
const values = (...lambda2: number[]) => minutes(lambda2.map((value) => ({ lambda2: value })))
const span = (raised: number, cleared: number | null) => ({
  raisedAtMs: raised * MINUTE_MS,
  clearedAtMs: cleared === null ? null : cleared * MINUTE_MS,
})

describe('a rule replayed', () => {
  it.each([
    { name: 'nothing over a firm overlay', series: values(1, 1, 1), spans: [] },
    { name: 'nothing for less than the on-delay', series: values(1, 0.5, 0.5, 1, 0.5, 0.5), spans: [] },
    {
      name: 'raises after the on-delay and stays so',
      series: values(1, 0.5, 0.5, 0.5),
      spans: [span(3, null)],
    },
    {
      name: 'clears after the off-delay past the margin',
      series: values(0.5, 0.5, 0.5, 0.8, 0.8, 0.8, 0.8),
      spans: [span(2, 6)],
    },
    {
      name: 'does not clear between limit and margin',
      series: values(0.5, 0.5, 0.5, 0.65, 0.65, 0.65, 0.65, 0.65),
      spans: [span(2, null)],
    },
    {
      name: 'raises twice where it was over between',
      series: values(0.5, 0.5, 0.5, 1, 1, 1, 1, 0.5, 0.5, 0.5),
      spans: [span(2, 6), span(9, null)],
    },
    {
      name: 'neither raises nor clears on what is not fresh',
      series: minutes([
        { lambda2: 0.5 },
        { lambda2: 0.5 },
        { lambda2: 0.5 },
        ...Array.from({ length: 6 }, () => ({ isFresh: false, lambda2: 1 })),
      ]),
      spans: [span(2, null)],
    },
  ])('$name', ({ series, spans }) => {
    expect(replay(FLOOR, series)).toEqual(spans)
  })

  it('makes the means of a falling rule from the series itself', () => {
    const rule: ReplayedRule = {
      settings: {
        kind: 'falling',
        means: 'minute',
        windowHours: 1,
        floor: { of: 'usual', percent: 60 },
        withinHours: 1,
        probabilityPercent: 80,
      },
      onDelaySeconds: 0,
      clearMarginPercent: 15,
      offDelaySeconds: 0,
    }
    // Firm for an hour, then 0.5 % a minute: the floor is met 80 minutes later.
    const wobble = (minute: number): number => 0.01 * Math.sin(minute * 2.4)
    const firm = Array.from({ length: 60 }, (_, minute) => 1 + wobble(minute))
    const falling = Array.from({ length: 80 }, (_, minute) => 1 - 0.005 * minute + wobble(minute))
    expect(replay(rule, values(...firm))).toEqual([])
    const [first] = replay(rule, values(...firm, ...falling))
    const raised = first!.raisedAtMs / MINUTE_MS
    expect(raised).toBeGreaterThan(60)
    expect(raised).toBeLessThan(60 + 60)
  })
})
