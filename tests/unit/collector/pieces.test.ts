import { describe, expect, it } from 'vitest'
import { labelFollowed } from '@/lib/collector/follows'
import { LinkWatch } from '@/lib/collector/link-watch'
import { joinNamings, type Naming } from '@/lib/collector/namings'
import { isPassDue } from '@/lib/collector/passes'
import { heldOf, judgeReport } from '@/lib/collector/report-check'
import { trendOf } from '@/lib/collector/trend'
import { HOUR_MS, usualOf } from '@/lib/collector/usual'
import { listOf } from '@/lib/collector/words'
import { fillWithheld } from '@/lib/data/fill-withheld'
import { isStorable } from '@/lib/http/storable'
import type { Snapshot } from '@/lib/method/control'
import { theilSen } from '@/lib/warn/stats/theil-sen'
import { someReport } from '@/tests/support/reports'

describe('the trend', () => {
  const line = (count: number, slope: number, half = 0.01): [number, number, number][] =>
    Array.from({ length: count }, (_, index) => [index * 2_000, 1 + slope * index, half])

  it('is not told from fewer than twenty readings', () => {
    expect([trendOf(line(19, -0.02)), trendOf(line(20, -0.02))]).toEqual([null, 'falling'])
  })

  it('is steady where the change over the window is under a tenth', () => {
    expect([trendOf(line(150, -0.0006)), trendOf(line(150, -0.0008)), trendOf(line(150, 0.0008))]).toEqual([
      'steady',
      'falling',
      'rising',
    ])
  })

  it('is steady where the change is within the half-width of the readings', () => {
    expect(trendOf(line(150, -0.001, 0.2))).toBe('steady')
  })

  it('is steady where a fall is being made good, and where a rise is being lost', () => {
    const bent = (sign: 1 | -1) =>
      line(60, 0).map(([at, value, half], index): [number, number, number] => [
        at,
        value + (sign * Math.max(0, Math.abs(index - 42) - 1)) / 60,
        half,
      ])
    expect([trendOf(bent(1)), trendOf(bent(-1))]).toEqual(['steady', 'steady'])
    expect([trendOf(bent(1).slice(0, 42)), trendOf(bent(-1).slice(0, 42))]).toEqual(['falling', 'rising'])
  })

  it('is not moved by a quarter of readings being far off', () => {
    const readings = line(60, 0.01).map(([at, value, half], index): [number, number, number] =>
      index % 4 === 0 ? [at, value * 50, half] : [at, value, half],
    )
    expect(theilSen(readings) * 2_000).toBeCloseTo(0.01, 2)
  })
})

describe('the label a cut follows', () => {
  const node = (side: 'a' | 'b' | null, labels: Record<string, string>) => ({ side, labels })

  it('is the one with the fewest values of those that lie wholly on one side', () => {
    const nodes = [
      node('a', { harbour: 'Tarnwick', coast: 'west' }),
      node('a', { harbour: 'Tarnwick', coast: 'west' }),
      node('a', { harbour: 'Gullhythe', coast: 'west' }),
      node('b', { harbour: 'Eelholm', coast: 'east' }),
      node('b', { harbour: 'Eelholm', coast: 'east' }),
      node('b', { harbour: 'Pinnet Bay', coast: 'east' }),
      node(null, { harbour: 'Tarnwick', coast: 'east' }),
    ]
    expect(labelFollowed(nodes)).toEqual({ key: 'coast', a: ['west'], b: ['east'] })
  })

  it('is none where a value stands on both sides, where a node lacks the key, or where every node differs', () => {
    const none: Record<string, string> = {}
    const four = (label: (index: number) => Record<string, string>) =>
      labelFollowed(Array.from({ length: 4 }, (_, index) => node(index < 2 ? 'a' : 'b', label(index))))
    expect(four((index) => ({ harbour: index < 3 ? 'Tarnwick' : 'Eelholm' }))).toBeNull()
    expect(four((index) => (index === 0 ? none : { harbour: index < 2 ? 'Tarnwick' : 'Eelholm' }))).toBeNull()
    expect(four((index) => ({ host: `host-${index}` }))).toBeNull()
    expect(four(() => ({ harbour: 'Tarnwick' }))).toBeNull()
  })
})

describe('a report', () => {
  const held = heldOf(null, someReport(5))

  it('is new when its number is, or its incarnation', () => {
    expect(judgeReport(held, someReport(6))).toEqual({ kind: 'new' })
    expect(judgeReport(held, { ...someReport(1), incarnation: 'incarnation-2' })).toEqual({ kind: 'new' })
    expect(judgeReport(null, someReport(1))).toEqual({ kind: 'new' })
  })

  it('is late when it is of an incarnation before, whatever its number', () => {
    const restarted = heldOf(held, { ...someReport(1), incarnation: 'incarnation-2' })
    const later = heldOf(restarted, { ...someReport(2), incarnation: 'incarnation-2' })
    expect(judgeReport(later, someReport(6))).toEqual({ kind: 'late' })
    expect(judgeReport(later, { ...someReport(1), incarnation: 'incarnation-3' })).toEqual({ kind: 'new' })
  })

  it('is repeated when its number is not larger', () => {
    expect(judgeReport(held, someReport(5))).toEqual({ kind: 'repeated' })
    expect(judgeReport(held, someReport(2))).toEqual({ kind: 'repeated' })
  })

  it('whose counters fall within a seeding is told so; a newer seeding counts from zero', () => {
    const fallen = someReport(6, (counters) => ({ ...counters, kills: counters.kills - 40 }))
    expect(judgeReport(held, fallen)).toEqual({
      kind: 'falling',
      colony: 0,
      counter: 'kills',
      from: 50,
      to: 20,
    })
    const reseeded = {
      ...fallen,
      sums: { ...fallen.sums, colonies: fallen.sums.colonies.map((c) => ({ ...c, seeding: 99 })) },
    }
    expect(judgeReport(held, reseeded)).toEqual({ kind: 'new' })
    const older = {
      ...fallen,
      sums: { ...fallen.sums, colonies: fallen.sums.colonies.map((c) => ({ ...c, seeding: 1 })) },
    }
    expect(judgeReport(held, older)).toEqual({
      kind: 'falling',
      colony: 0,
      counter: 'seeding',
      from: 3,
      to: 1,
    })
  })

  it('is storable unless some text has a NUL or half a surrogate pair, anywhere', () => {
    expect([isStorable({ a: ['tide 🌊'] }), isStorable({ a: ['\0'] }), isStorable({ '\ud83c': 1 })]).toEqual([
      true,
      false,
      false,
    ])
  })
})

describe('a pass', () => {
  it('is due when less than half of its life is left, or when it is not known', () => {
    expect([
      isPassDue(501, 0, 1_000),
      isPassDue(500, 0, 1_000),
      isPassDue(499, 0, 1_000),
      isPassDue(null, 0, 1_000),
    ]).toEqual([false, false, true, true])
  })
})

describe('the usual', () => {
  it('is the median of hourly medians, from seven days on, of the last thirty', () => {
    const hours = (days: number) =>
      new Map(Array.from({ length: days * 24 }, (_, hour) => [hour * HOUR_MS, hour < 24 ? 100 : 1]))
    const day = 24 * HOUR_MS
    expect(usualOf(new Map(), 40 * day)).toBeNull()
    expect(usualOf(hours(7), 7 * day - 1)).toBeNull()
    expect(usualOf(hours(7), 7 * day)).toBe(1)
    expect(usualOf(new Map([[0, 100]]), 31 * day)).toBeNull()
  })
})

describe('readings that were withheld and not stored', () => {
  const point = (seconds: number, lambda2: number | null) => ({
    at: new Date(seconds * 1000).toISOString(),
    lambda2,
    low: null,
    high: null,
    level: null,
    data: 'unheard' as const,
    demo: false,
  })
  it('are put back between rows, over no longer than rows may be apart, and not beyond the most', () => {
    const times = (points: { at: string }[]) => points.map(({ at }) => Date.parse(at) / 1000)
    const init = { stepMs: 4_000, intervalMs: 2_000, most: 100 }
    expect(
      times(
        fillWithheld(
          [point(0, 1), point(4, null), point(20, null), point(60, null), point(64, 1), point(76, 1)],
          init,
        ),
      ),
    ).toEqual([0, 4, 8, 12, 16, 20, 60, 64, 76])
    expect(fillWithheld([point(0, null), point(20, null)], { ...init, most: 3 })).toHaveLength(3)
  })
})

describe('a link', () => {
  const naming = (name: string, heard: boolean, links: Naming['links']): Naming => ({
    agentId: `id-${name}`,
    name,
    heard,
    heardAtMs: heard ? 9_000 : 1_000,
    links,
  })
  const to = (name: string, weight: number, share: number | null) => ({ peer: `id-${name}`, weight, share })
  const side = (agentId: string) => (agentId.startsWith('id-tar') ? 'a' : 'b')

  it('is made of what both its ends say, the heard one first; only silent ones know it as lost', () => {
    const links = joinNamings(
      [
        naming('tar-01', true, [to('eel-01', 0.8, 0.3), to('tar-02', 1, null), to('gone', 1, null)]),
        naming('tar-02', true, [to('tar-01', 1, null)]),
        naming('eel-01', false, [to('tar-01', 0.2, 0.9), to('eel-02', 1, 0.1), to('tar-02', 1, 0.2)]),
        naming('eel-02', false, [to('eel-01', 0.5, 0.3)]),
      ],
      side,
    )
    expect(links.map(({ heardAt, ...link }) => [...Object.values(link), Date.parse(heardAt)])).toEqual([
      ['eel-01', 'eel-02', 0.5, 'lost', 0.2, false, 1_000],
      ['eel-01', 'tar-01', 0.8, 'live', 0.3, true, 9_000],
      ['eel-01', 'tar-02', 1, 'lost', 0.2, true, 1_000],
      ['tar-01', 'tar-02', 1, 'live', null, false, 9_000],
    ])
  })

  it('is said to be lost, and found, once it stays so, and not while an end is silent', () => {
    const watch = new LinkWatch()
    const look = (second: number, names: boolean, silent = false) => {
      const agent = (agentId: string, peer: string): Snapshot['agents'][number] => {
        const report = someReport(1)
        const links = names ? [{ peer, weight: 1, share: null }] : []
        return {
          agentId,
          joinedAtMs: 0,
          last: {
            receivedAtMs: silent ? -60_000 : second * 1000,
            report: { ...report, node: { ...report.node, links } },
          },
        }
      }
      return watch.watch(
        { atMs: second * 1000, agents: [agent('1', '2'), agent('2', '1')] },
        (id) => `tar-0${id}`,
        1_000,
      )
    }
    for (let second = 0; second < 12; second++) expect(look(second, true)).toEqual([])
    expect(look(12, false)).toEqual([])
    expect(look(14, true)).toEqual([])
    expect([look(15, false), look(17, false)]).toEqual([[], []])
    const data = { links: [['tar-01', 'tar-02']] }
    expect(look(18, false)).toEqual([
      {
        kind: 'link-lost',
        text: 'link tar-01 – tar-02 lost',
        said: ['link ', { node: 'tar-01' }, ' – ', { node: 'tar-02' }, ' lost'],
        data,
      },
    ])
    expect([look(19, true, true), look(30, true, true)]).toEqual([[], []])
    expect(look(31, true)).toEqual([])
    expect(look(34, true)).toMatchObject([{ kind: 'link-found', text: 'link tar-01 – tar-02 found', data }])
  })

  it('is said to have weakened, and to deliver as before, once it stays so', () => {
    const watch = new LinkWatch()
    const look = (second: number, weight: number) => {
      const agent = (agentId: string, peer: string): Snapshot['agents'][number] => {
        const report = someReport(1)
        const links = [{ peer, weight: agentId === '1' ? weight : 1, share: null }]
        return {
          agentId,
          joinedAtMs: 0,
          last: {
            receivedAtMs: second * 1000,
            report: { ...report, node: { ...report.node, links } },
          },
        }
      }
      const agents = [agent('1', '2'), agent('2', '1')]
      return watch.watch({ atMs: second * 1000, agents }, (id) => `tar-0${id}`, 1_000)
    }
    for (let second = 0; second < 12; second++) expect(look(second, 0.9)).toEqual([])
    // Not yet half of what it was; then for a moment; then for long.
    expect([look(12, 0.5), look(16, 0.4), look(18, 0.5), look(19, 0.4), look(21, 0.4)].flat()).toEqual([])
    const data = { links: [['tar-01', 'tar-02']] }
    const said = (what: string) => ['link ', { node: 'tar-01' }, ' – ', { node: 'tar-02' }, what]
    const weakened = 'link tar-01 – tar-02 delivers less than 50 % of what it did'
    expect(look(22, 0.3)).toEqual([
      { kind: 'link-weakened', text: weakened, said: said(' delivers less than 50 % of what it did'), data },
    ])
    expect([look(30, 0.2), look(31, 0.7), look(40, 0.75), look(41, 0.6)].flat()).toEqual([])
    expect([look(42, 0.9), look(44, 0.4), look(45, 0.8), look(47, 0.8)].flat()).toEqual([])
    expect(look(48, 0.8)).toEqual([
      {
        kind: 'link-recovered',
        text: 'link tar-01 – tar-02 delivers as before',
        said: said(' delivers as before'),
        data,
      },
    ])
  })
})

it('names are listed in words, many of them counted', () => {
  const names = ['A', 'B', 'C', 'D', 'E']
  expect([0, 1, 2, 4, 5].map((count) => listOf(names.slice(0, count)))).toEqual([
    '',
    'A',
    'A and B',
    'A, B, C and D',
    'A, B, C and 2 more',
  ])
})
