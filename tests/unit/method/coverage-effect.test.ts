import { describe, expect, it } from 'vitest'
import { LEAST_HEARD } from '@/lib/method/control'
import {
  type EffectRow,
  UNHEARD_EFFECT,
  unheardEffect,
  WITHOUT_AGENT_EFFECT,
  withoutAgentEffect,
} from '@/lib/method/coverage-effect'
import { twoClusters } from '@/lib/method/graphs'
import { createRandom } from '@/lib/method/random'
import { simulateOn, watch } from '../../support/overlays'

describe.each([
  ['agents unheard', UNHEARD_EFFECT, unheardEffect],
  ['nodes without an agent', WITHOUT_AGENT_EFFECT, withoutAgentEffect],
])('what %s do to the reading', (_, rows, effect) => {
  const [first, second] = rows as [EffectRow, EffectRow]
  const last = rows.at(-1)!
  const outer = (...of: { low: number; high: number }[]) => ({
    low: Math.min(...of.map(({ low }) => low)),
    high: Math.max(...of.map(({ high }) => high)),
  })
  const full = { low: 1, high: 1 }

  it.each([
    ['is not spoken of where nothing is missing', 0, null],
    ['is that of the first row or nothing at all below it', first.share / 10, outer(full, first)],
    ['is that of a row at its share', second.share, outer(second)],
    ['is the outer of two rows between them', (first.share + second.share) / 2, outer(first, second)],
    ['is that of the last row at its share', last.share, outer(last)],
    ['is not known beyond the last row', last.share + 1e-9, null],
    ['is not known of no agents', 0 / 0, null],
  ])('%s', (_sentence, share, range) => {
    expect(effect(share)).toEqual(range)
  })

  it('is listed by ascending share', () => {
    expect(rows.map(({ share }) => share)).toEqual(rows.map(({ share }) => share).toSorted((a, b) => a - b))
  })
})

describe('agents unheard', () => {
  it('are spoken of for as long as a reading is given', () => {
    expect(UNHEARD_EFFECT.at(-1)!.share).toBeCloseTo(1 - LEAST_HEARD, 12)
  })

  it('move the reading of an overlay that was not measured for it, nearly always within what is stated', {
    timeout: 30_000,
  }, () => {
    const graph = twoClusters({ perSide: 12, degree: 4, links: 4 }, createRandom('unheard'))
    const simulation = simulateOn(graph, 'unheard')
    simulation.run(50_000)
    const random = createRandom('silent')
    const ratios = Array.from({ length: 5 }, () => {
      const first = Math.floor(random.uniform() * graph.nodes)
      const step = 1 + Math.floor(random.uniform() * 10)
      const silent = [0, 1].map((i) => (first + i * step) % graph.nodes)
      for (const [index, agent] of simulation.agents.entries()) agent.silent = silent.includes(index)
      simulation.run(24_000)
      return watch(simulation, 8_000).mean
    })
    const { low, high } = unheardEffect(2 / graph.nodes)!
    const within = ratios.filter((ratio) => low <= ratio && ratio <= high)
    expect(within.length, ratios.join(' ')).toBeGreaterThanOrEqual(4)
    expect(Math.max(...ratios.map((ratio) => Math.abs(ratio - 1)))).toBeGreaterThan(0.03)
  })
})
