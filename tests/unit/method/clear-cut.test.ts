import { describe, expect, it } from 'vitest'
import { DEFAULT_SETTINGS } from '@/lib/method/control'
import {
  aloneIn,
  CLEAR_INTERVALS,
  type ClearCut,
  clearCutNow,
  SAID_WITHIN_INTERVALS,
} from '@/lib/method/control/clear-cut'
import { RENEWAL_INTERVALS } from '@/lib/method/control/renewal'
import type { ColonyControl } from '@/lib/method/control/state'
import { edgesOf, fromEdges, type SparseGraph } from '@/lib/method/graph'
import { randomRegular, twoClusters } from '@/lib/method/graphs'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { Simulation } from '@/lib/method/simulate'
import { chanceOf } from '@/scripts/bench/leak/shares'
import { namedBySides } from '@/scripts/bench/leak/sides'

const INTERVAL_MS = 2_000

/**
 * λ₃ over λ₂, for so many intervals; null where there is no reading, 'unbounded' where nothing is known of λ₃, 'alone' where a young colony
 * shows no second mode.
 */
type Spell = [ratio: number | null | 'unbounded' | 'alone', intervals: number, settling?: 'settling']

function standsAfter(spells: readonly Spell[]): boolean {
  let clearCut: ClearCut | null = null
  let atMs = 0
  for (const [ratio, intervals, settling] of spells)
    for (let interval = 0; interval < intervals; interval++) {
      atMs += INTERVAL_MS
      const lambda3AtMost = typeof ratio === 'number' ? 0.5 * ratio : null
      clearCut = clearCutNow(clearCut, {
        ...{ atMs, intervalMs: INTERVAL_MS, settling: settling !== undefined },
        ...{
          lambda2: ratio === null ? null : 0.5,
          lambda3AtMost,
          aloneBy: ratio === 'alone' ? Math.floor(atMs / INTERVAL_MS / RENEWAL_INTERVALS) : null,
        },
      })
    }
  return clearCut?.stands ?? false
}

const LONG = CLEAR_INTERVALS + 1

const courses: [what: string, spells: Spell[], stands: boolean][] = [
  ['stands out once it has long been clear', [[1.8, LONG]], true],
  ['does not yet one interval before', [[1.8, LONG - 1]], false],
  ['does not while another is nearly as weak', [[1.75, 10 * LONG]], false],
  ['does not while the reading settles', [[3, 10 * LONG, 'settling']], false],
  [
    'begins anew after a moment of doubt',
    [
      [1.8, LONG - 1],
      [1.7, 1],
      [1.8, LONG - 1],
    ],
    false,
  ],
  [
    'stays while it is a little less clear',
    [
      [1.8, LONG],
      [1.41, 10 * LONG],
    ],
    true,
  ],
  [
    'stays while the reading settles',
    [
      [1.8, LONG],
      [2, LONG, 'settling'],
    ],
    true,
  ],
  [
    'stays while nothing is known of another',
    [
      [1.8, LONG],
      ['unbounded', LONG, 'settling'],
    ],
    true,
  ],
  ['does not while nothing is known of another', [['unbounded', 10 * LONG]], false],
  ['stands out where young colonies show no other', [['alone', LONG + RENEWAL_INTERVALS]], true],
  [
    'does not by one young colony alone',
    [
      ['alone', 4],
      ['unbounded', 10 * LONG],
    ],
    false,
  ],
  [
    'stands out where now and then something says so',
    [
      [1.8, 1],
      ['unbounded', 14],
      ['alone', 4],
      ['unbounded', 14],
      ['alone', 4],
    ],
    true,
  ],
  [
    'does not where nothing has said so for long',
    [
      [1.8, 5],
      ['unbounded', SAID_WITHIN_INTERVALS + 1],
      [1.8, 5],
    ],
    false,
  ],
  [
    'does not where another was near between',
    [
      ['alone', LONG - 2],
      [1.5, 1],
      ['alone', LONG - 2],
    ],
    false,
  ],
  ['does not by young colonies while the reading settles', [['alone', 10 * LONG, 'settling']], false],
  [
    'is over as another comes near',
    [
      [1.8, LONG],
      [1.4, 1],
    ],
    false,
  ],
  [
    'stays while there is no reading',
    [
      [1.8, LONG],
      [null, LONG],
    ],
    true,
  ],
  [
    'begins anew after a time without a reading',
    [
      [1.8, LONG - 1],
      [null, 1],
      [1.8, LONG - 1],
    ],
    false,
  ],
]

describe('the one weakest cut', () => {
  it('is not clear by two readings that are far apart', () => {
    const now = { lambda2: 0.5, lambda3AtMost: 2, aloneBy: null, settling: false, intervalMs: INTERVAL_MS }
    const first = clearCutNow(null, { ...now, atMs: 0 })
    expect(clearCutNow(first, { ...now, atMs: 500 * INTERVAL_MS })?.stands).toBe(false)
  })

  it.each(courses)('%s', (_what, spells, stands) => expect(standsAfter(spells)).toBe(stands))
})

/** How many nodes of a sealed overlay tell a side, at most, from its first moment on. */
function tellersOf(graph: SparseGraph, intervals: number): number {
  const pace = PACES.calm
  const links = edgesOf(graph).map(([a, b, weight]) => ({ a, b, weight }))
  const simulation = new Simulation(
    { random: createRandom('leak 60 1') },
    {
      nodes: graph.nodes,
      links,
      settings: { ...DEFAULT_SETTINGS, pace, disclosure: 'sealed' },
      audits: false,
    },
  )
  const tellers = new Set<string>()
  for (const [node, agent] of simulation.agents.entries())
    agent.lie = {
      report: (report) => {
        if (report.node.value) tellers.add(`${node}`)
        return report
      },
    }
  simulation.run(intervals * pace.intervalMs)
  return tellers.size
}

describe('a young colony that shows no second mode', () => {
  const aged = (...ages: number[]) => ({
    colonies: ages.map((age) => {
      const seededAtMs = 100_000 - age * 1_000
      return { seededAtMs, seeding: seededAtMs } as ColonyControl
    }),
  })
  const now = { atMs: 100_000, linkTimePerSecond: 0.2 }

  it.each<[string, { colonies: ColonyControl[] }, number[], number | null]>([
    ['says that the first stands alone', aged(40, 30, 8), [1], 92_000],
    ['says nothing once it is old', aged(40, 30, 9.1), [1], null],
    ['is young for longer where λ₂ is smaller', aged(40, 30, 17), [0.5], 83_000],
    ['says nothing where there is a second', aged(40, 30, 8), [1, 1.5], null],
    ['says nothing where it is by itself', aged(8), [1], null],
    ['says nothing where there is no reading', aged(40, 8), [], null],
  ])('%s', (_, subspace, values, seeding) => expect(aloneIn(subspace, { values }, now)).toBe(seeding))
})

describe('nodes of a sealed overlay', () => {
  it('tell no side where no cut is the weakest, also while the first reading settles', () =>
    expect(tellersOf(randomRegular(60, 6, createRandom('regular-60 1')), 60)).toBe(0))

  it('tell none where one has fewer than five nodes: they would be neighbours of each other', () => {
    const body = randomRegular(32, 8, createRandom('tail'))
    const tail = [0, 1, 2].map((at) => [32 + at, at === 0 ? 0 : 31 + at, 1] as const)
    expect(tellersOf(fromEdges(35, [...edgesOf(body), ...tail]), 80)).toBe(0)
  })

  it('all tell theirs where one is', () => {
    const clusters = twoClusters({ perSide: 8, degree: 4, links: 3 }, createRandom('standing'))
    expect(tellersOf(clusters, 60)).toBe(16)
  })
})

describe('the sides that are told over a day in which links go and come back', () => {
  const graph = randomRegular(60, 6, createRandom('regular-60 1'))
  const day = { seed: 1, hours: 24, lostPerHour: 4 }

  it('name links no better than chance', () =>
    expect(namedBySides(graph, day).every - chanceOf(graph)).toBeLessThanOrEqual(0.03))

  it('would name them if they were told of whichever cut is the weakest', () => {
    const always = namedBySides(graph, day, (_before, { atMs }) => ({ atMs, clearMs: 0, stands: true }))
    expect(always.toldShare).toBe(1)
    expect(always.every - chanceOf(graph)).toBeGreaterThan(0.1)
  })
})
