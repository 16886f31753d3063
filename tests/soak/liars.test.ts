import { describe, expect, it } from 'vitest'
import { edgesOf, fromEdges } from '@/lib/method/graph'
import { hubOnRegular, randomRegular, tree, twoClusters } from '@/lib/method/graphs'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import type { Simulation } from '@/lib/method/simulate'
import { auditedOn, LIES, type Outcome, tryLie } from '../support/liars'
import { STEADY } from '../support/overlays'

const MINUTES = Number(process.env.THINSPAN_SOAK_MINUTES ?? 30)
const clusters = twoClusters({ perSide: 18, degree: 6, links: 5 }, createRandom('traps'))
const isCrossing = ([a, b]: readonly [number, number, ...unknown[]]): boolean => a < 18 !== b < 18
const crossing = edgesOf(clusters).filter(isCrossing)
const places = {
  'on the cut': { graph: clusters, liar: crossing[0]![0] },
  'inside a cluster': {
    graph: clusters,
    liar: Array.from({ length: 18 }, (_, node) => node).find((node) => crossing.every(([a]) => a !== node))!,
  },
  'on a random regular graph': { graph: randomRegular(36, 6, createRandom('regular')), liar: 3 },
}

const say = (line: string): void => {
  process.stdout.write(`${line}\n`)
}
const seconds = (ms: number | null): string => (ms === null ? '–' : (ms / 1000).toFixed(0)).padStart(5)

describe.each(Object.entries(places))('a liar %s', (where, place) => {
  it.each(Object.entries(LIES))('is left out, and the reading is right again: %s', (name, lie) => {
    const outcome: Outcome = tryLie({ ...place, lie, limitMs: 300_000 })
    say(
      `${name.padEnd(36)} ${where.padEnd(26)} out ${seconds(outcome.detectedMs)} s, lied ×${outcome.lied.toFixed(2)}, then ×${outcome.worst.toFixed(3)}: ${outcome.because}`,
    )
    expect(outcome.detectedMs).not.toBeNull()
    expect(Math.abs(outcome.worst - 1)).toBeLessThan(0.05)
    expect(outcome.wronged).toEqual([])
  })
})

const leaf = fromEdges(37, [...edgesOf(randomRegular(36, 6, createRandom('leaf'))), [0, 36]])
const honest = {
  'two clusters': clusters,
  'random regular': randomRegular(36, 6, createRandom('regular')),
  'binary tree': tree(31),
  'a hub of degree 100': hubOnRegular({ nodes: 100, degree: 4, hubDegree: 100 }, createRandom('hub')),
  'a leaf on a mesh': leaf,
}

/** One trouble each half minute, by turns: stalls, restarts, weights, losses, links cut and joined again. */
function trouble(simulation: Simulation, minutes: number): void {
  const random = createRandom('trouble')
  const pick = (limit: number): number => Math.floor(random.uniform() * limit)
  const { agents } = simulation
  for (let index = 0; index < agents.length; index += 7) agents[index]!.slowness = 3
  for (let turn = 0; turn < 2 * minutes; turn++) {
    const links = simulation.liveLinks()
    const { a, b } = links[pick(links.length)]!
    const agent = pick(agents.length)
    switch (turn % 5) {
      case 0:
        agents[agent]!.stalledUntilMs = simulation.nowMs + 3_000 + 12_000 * random.uniform()
        break
      case 1:
        simulation.stop(agent)
        simulation.run(3_000)
        simulation.start(agent)
        break
      case 2:
        simulation.weaken(a, b, [0.3, 0.6, 1][pick(3)]!)
        break
      case 3:
        simulation.setLoss(a, b, [0.1, 0.3, 0][pick(3)]!)
        break
      default:
        agents[agent]!.silent = true
        simulation.run(15_000)
        agents[agent]!.silent = false
    }
    simulation.run(30_000)
  }
}

describe.each(Object.entries(honest))('honest agents: %s', (_, graph) => {
  it(`accuse and lose nobody in ${MINUTES} simulated minutes of trouble`, () => {
    const { simulation, because } = auditedOn(graph, 'honest', { reportLoss: 0.05, ordersLoss: 0.05 })
    trouble(simulation, MINUTES)
    expect(because).toEqual([])
    expect(simulation.refusals).toEqual([])
  })
})

it(`accuse and lose nobody at drill pace in ${MINUTES / 10} simulated minutes`, () => {
  const settings = { ...STEADY, pace: PACES.drill }
  const { simulation, because } = auditedOn(clusters, 'drill', { settings })
  simulation.run(MINUTES * 6_000)
  expect(because).toEqual([])
  expect(simulation.refusals).toEqual([])
})
