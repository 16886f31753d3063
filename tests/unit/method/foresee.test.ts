import { describe, expect, it } from 'vitest'
import { DEFAULT_SETTINGS } from '@/lib/method/control'
import { foresee, type Given, givenSince } from '@/lib/method/control/foresee'
import { edgesOf } from '@/lib/method/graph'
import { randomRegular } from '@/lib/method/graphs'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { Simulation } from '@/lib/method/simulate'

const rates = { deathRate: 0.5, populationX: 1000, populationY: 1000, present: 10 }
const told = (atMs: number, birthRateX: number, birthRateY = birthRateX): Given => ({
  ...{ atMs, linkTimePerSecond: 0.2 },
  ...{ birthRateX, birthRateY },
})
const times = { fromMs: 10_000, toMs: 14_000 }
/** Link time of four seconds. */
const T = 0.8

describe('populations foreseen', () => {
  it('stay where births replace what dies', () => {
    expect(foresee(rates, [told(0, 0.5)], times)).toEqual(rates)
  })

  it('grow by their births alone where nothing dies', () => {
    const { populationX, populationY } = foresee({ ...rates, deathRate: 0 }, [told(0, 0.5, -0.25)], times)
    expect(populationX).toBeCloseTo(1000 * Math.exp(0.5 * T), 6)
    expect(populationY).toBeCloseTo(1000 * Math.exp(-0.25 * T), 6)
  })

  // Both lose as many to kills, so that what they differ by grows by births alone.
  it('grow apart as fast as they are born', () => {
    const uneven = { ...rates, populationX: 1100, populationY: 900 }
    const { populationX, populationY } = foresee(uneven, [told(0, 0.5)], times)
    expect((populationX - populationY) / (200 * Math.exp(0.5 * T))).toBeCloseTo(1, 2)
  })

  it('follow what was told in the meantime, each from its moment on', () => {
    const course = [told(0, 0), told(11_000, 1), told(13_000, -0.5)]
    const { populationX } = foresee({ ...rates, deathRate: 0 }, course, times)
    expect(populationX).toBeCloseTo(1000 * Math.exp(0.4 - 0.1), 6)
  })

  it.each<[string, Given[], Partial<typeof times>]>([
    ['where nothing is known to have walked', [], {}],
    ['before anything is known to have walked', [told(14_000, 1)], {}],
    ['at the moment of the sums', [told(0, 1)], { toMs: 10_000 }],
  ])('are those of the sums %s', (_, given, some) => {
    expect(foresee(rates, given, { ...times, ...some })).toEqual(rates)
  })

  it.each([
    ['a type is gone', { ...rates, populationX: 0 }],
    ['nothing was walked', { ...rates, deathRate: null }],
  ])('are those of the sums where %s', (_, sums) => {
    expect(foresee(sums, [told(0, 1)], times)).toEqual(sums)
  })

  it('never fall below nothing, however much dies', () => {
    const { populationX } = foresee(
      { ...rates, deathRate: 50, populationX: 1 },
      [{ ...told(0, 0), linkTimePerSecond: 9 }],
      times,
    )
    expect(populationX).toBeGreaterThanOrEqual(0)
  })

  it('need what was in force at the moment of the sums, and since', () => {
    const course = [told(0, 1), told(5_000, 2), told(11_000, 3)]
    expect(givenSince(course, 10_000)).toEqual(course.slice(1))
    expect(givenSince(undefined, 10_000)).toEqual([])
  })
})

it('both types of a sealed overlay stay about even, though its sums are two intervals old', () => {
  const graph = randomRegular(24, 6, createRandom('even'))
  const simulation = new Simulation(
    { random: createRandom('even') },
    {
      nodes: graph.nodes,
      links: edgesOf(graph).map(([a, b, weight]) => ({ a, b, weight })),
      settings: { ...DEFAULT_SETTINGS, pace: PACES.brisk, disclosure: 'sealed' },
    },
  )
  simulation.run(40_000)
  const uneven: number[] = []
  for (let look = 0; look < 40; look++) {
    simulation.run(1_000)
    for (const { colony, seeding, seededAtMs } of simulation.control.colonies) {
      // A new one is led to its size first.
      if (simulation.nowMs - seededAtMs < 10_000) continue
      const own = simulation.agents
        .flatMap(({ node }) => node.held())
        .filter((held) => held.colony === colony && held.seeding === seeding)
      const x = own.reduce((total, held) => total + held.x, 0)
      const y = own.reduce((total, held) => total + held.y, 0)
      uneven.push(Math.abs(x - y) / (x + y))
    }
  }
  expect(uneven.length).toBeGreaterThan(100)
  expect(Math.max(...uneven)).toBeLessThan(0.2)
})
