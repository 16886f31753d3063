import { describe, expect, it } from 'vitest'
import type { PlannedLink } from '@/lib/data/reinforcement-dto'
import {
  broughtText,
  forecastText,
  gainText,
  limitsQuery,
  NO_LIMITS,
  proposedPaths,
} from '@/lib/face/reinforcement'
import { layoutStretch } from '@/lib/face/stretch'

const link: PlannedLink = {
  ...{ id: 'p', a: 'eel-09', b: 'tar-01', state: 'joined', method: 'exact', weight: 1 },
  ...{ lambda2Then: 0.2, forecast: 0.3, plannedAt: '2026-12-02T10:00:00.000Z', plannedBy: null },
  before: { at: '2026-12-02T10:01:00.000Z', lambda2: 0.21 },
  after: { at: '2026-12-02T10:05:00.000Z', lambda2: 0.302 },
  ...{ joinedAt: '2026-12-02T10:02:00.000Z', seenBy: 'named' },
}

describe('what a planned link brought', () => {
  it.each<[Partial<PlannedLink>, string]>([
    [{}, '+0.092, where +0.100 was foretold'],
    [{ method: 'first-order' }, '+0.092, where at most +0.100 was foretold'],
    [{ after: { at: '', lambda2: 0.18 } }, '−0.030, where +0.100 was foretold'],
    [{ after: null }, 'there; waiting for a settled reading'],
    [{ before: null }, 'the reading is 0.302; the one before is not known'],
    [{ state: 'planned' }, 'not there yet'],
    [{ state: 'withdrawn' }, 'withdrawn'],
  ])('%j', (over, text) => expect(broughtText({ ...link, ...over })).toBe(text))
})

describe('forecasts', () => {
  it('are rounded to the nearest where exact, and upward where they are bounds', () => {
    expect([forecastText('exact', 0.12345), forecastText('first-order', 0.12301)]).toEqual([
      '0.123',
      '≤ 0.124',
    ])
    const proposal = { a: end('a'), b: end('b'), lambda2: 0.2, gain: 0.0101 }
    expect([gainText('exact', proposal), gainText('first-order', proposal)]).toEqual(['+0.010', '≤ +0.011'])
  })

  it('are asked for with what is filled in only', () => {
    expect(limitsQuery(NO_LIMITS)).toBe('links=3')
    expect(limitsQuery({ ...NO_LIMITS, between: 'office', nodes: ' tar-01, eel-09 ' })).toBe(
      'links=3&between=office&nodes=tar-01%2C+eel-09',
    )
  })

  it('are drawn between the nodes that are drawn', () => {
    const nodes = [-1, 1].map((value, at) => ({
      ...{
        name: ['tar-01', 'eel-09'][at]!,
        labels: {},
        value,
        side: null,
        state: 'heard' as const,
        degree: 1,
      },
    }))
    const layout = layoutStretch({
      ...{ nodes, links: [], laneKey: null, sided: false, crossingLinks: null, silent: false, width: 700 },
    })
    const paths = proposedPaths(layout, [
      { a: end('eel-09'), b: end('tar-01') },
      { a: end('eel-09'), b: end('gone') },
    ])
    const [left, right] = layout.dots
    expect(paths).toHaveLength(1)
    expect(paths[0]?.ends).toEqual([
      { x: left?.x, y: left?.y },
      { x: right?.x, y: right?.y },
    ])
    expect(paths[0]?.path).toMatch(/^M[\d.]+ [\d.]+Q/)
  })
})

function end(name: string) {
  return { name, labels: {}, side: null, degree: null }
}
