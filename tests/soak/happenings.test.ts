/**
 * What happens to overlays, each with its expected course; none needs a person to reset anything. Real state machines and control loop
 * on a virtual clock; exact values by eigendecomposition of the links as they then are.
 */
import { describe, expect, it } from 'vitest'
import { DEFAULT_SETTINGS } from '@/lib/method/control'
import { type Edge, edgesOf, fromEdges, type SparseGraph } from '@/lib/method/graph'
import {
  clustersInRow,
  complete,
  hubOnRegular,
  path,
  preferentialAttachment,
  randomRegular,
  ring,
  star,
  tree,
  twoClusters,
} from '@/lib/method/graphs'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import type { Simulation } from '@/lib/method/simulate'
import { exactLambda2, simulateOn } from '../support/overlays'

const TOLERANCE = 0.05
const MINUTE_MS = 60_000
const clusters = twoClusters({ perSide: 18, degree: 6, links: 5 }, createRandom('traps'))

interface Readings {
  fresh: number
  settling: number
  withheld: number
  /** Of fresh ones, reading over exact: furthest from 1, and mean. */
  worst: number
  mean: number
}

/** Lets the overlay run and holds every fresh reading against what is true at that moment. */
function look(simulation: Simulation, ms: number, exact = () => exactLambda2(simulation)): Readings {
  const ratios: number[] = []
  const seen = { settling: 0, withheld: 0 }
  const value = exact()
  simulation.onEstimate = ({ lambda2, settling }) => {
    if (lambda2 === null) seen.withheld += 1
    else if (settling) seen.settling += 1
    else ratios.push(lambda2 / value)
  }
  simulation.run(ms)
  simulation.onEstimate = null
  const worst = ratios.reduce((far, ratio) => (Math.abs(ratio - 1) > Math.abs(far - 1) ? ratio : far), 1)
  const mean = ratios.reduce((sum, ratio) => sum + ratio, 0) / ratios.length
  return { ...seen, fresh: ratios.length, worst, mean }
}

function tell(name: string, { fresh, settling, withheld, worst, mean }: Readings): void {
  process.stdout.write(
    `${name.padEnd(54)} ${String(fresh).padStart(4)} fresh, ${settling} settling, ${withheld} withheld; mean ×${mean.toFixed(3)}, furthest ×${worst.toFixed(3)}\n`,
  )
}

/** Fresh readings come, and their mean is right. */
function expectRight(name: string, readings: Readings, tolerance = TOLERANCE): void {
  tell(name, readings)
  expect(readings.fresh).toBeGreaterThan(0)
  expect(Math.abs(readings.mean - 1)).toBeLessThan(tolerance)
}

describe('shapes', () => {
  const shapes: [string, SparseGraph, { tolerance?: number; settleMs?: number }][] = [
    ['two nodes', path(2), {}],
    ['three nodes in a row', path(3), {}],
    ['a star of 30', star(30), {}],
    ['a ring of 16', ring(16), {}],
    ['a binary tree of 31', tree(31), {}],
    ['a complete graph of 20', complete(20), {}],
    ['a hub of degree 200', hubOnRegular({ nodes: 200, degree: 4, hubDegree: 200 }, createRandom('hub')), {}],
    ['preferential attachment, 300', preferentialAttachment(300, 3, createRandom('pa')), {}],
  ]
  it.each(shapes)('are read right: %s', (name, graph, { tolerance, settleMs = 150_000 }) => {
    const simulation = simulateOn(graph, name)
    simulation.run(settleMs)
    expectRight(name, look(simulation, MINUTE_MS), tolerance)
  })

  it('have no reading where there is one node', () => {
    const simulation = simulateOn(fromEdges(1, []), 'one')
    simulation.run(MINUTE_MS)
    expect(simulation.estimate).toMatchObject({ withheld: 'too-few-nodes', lambda2: null })
  })

  it('are read without a node that has no links', () => {
    const simulation = simulateOn(fromEdges(37, edgesOf(clusters)), 'detached')
    simulation.run(90_000)
    expectRight('two clusters and a node without links', look(simulation, MINUTE_MS))
    expect(simulation.estimate!.coverage).toMatchObject({ joined: 37, attached: 36 })
  })
})

/** The largest takes an hour of one processor. */
const LARGE_TIMEOUT_MS = 4 * 60 * MINUTE_MS

describe('large overlays', () => {
  it.each([
    [
      'preferential attachment, 2,000',
      preferentialAttachment(2_000, 3, createRandom('2000')),
      PACES.steady,
      6,
    ],
    ['random 6-regular, 10,000, calm', randomRegular(10_000, 6, createRandom('10000')), PACES.calm, 15],
  ] as const)('are read right: %s', { timeout: LARGE_TIMEOUT_MS }, (name, graph, pace, minutes) => {
    const settings = { ...DEFAULT_SETTINGS, pace, disclosure: 'sealed' as const }
    const simulation = simulateOn(graph, name, { settings })
    simulation.run(minutes * MINUTE_MS)
    expectRight(name, look(simulation, 2 * MINUTE_MS))
  })
})

describe('silence', () => {
  it('of a third withholds the reading, and it comes back by itself', () => {
    const simulation = simulateOn(clusters, 'silent')
    simulation.run(90_000)
    const silent = simulation.agents.slice(0, 12)
    for (const agent of silent) agent.silent = true
    simulation.run(20_000)
    const away = look(simulation, 5 * MINUTE_MS)
    tell('a third silent', away)
    expect([away.fresh, away.settling]).toEqual([0, 0])
    for (const agent of silent) agent.silent = false
    simulation.run(30_000)
    expectRight('a third silent, 30 s after it is heard again', look(simulation, MINUTE_MS))
  })
})

describe('restarts', () => {
  const restart = (simulation: Simulation, agent: number): void => {
    simulation.stop(agent)
    simulation.run(4_000)
    simulation.start(agent)
  }

  it('of one agent every minute leave the readings between them right', () => {
    const simulation = simulateOn(clusters, 'restless')
    simulation.run(90_000)
    const all: Readings[] = []
    for (let minute = 0; minute < 15; minute++) {
      restart(simulation, 7)
      simulation.run(26_000)
      all.push(look(simulation, 30_000))
    }
    const fresh = all.filter((readings) => readings.fresh > 0)
    for (const [minute, readings] of all.entries()) tell(`restarted every minute, ${minute + 1}`, readings)
    expect(fresh.length).toBeGreaterThan(10)
    for (const { mean } of fresh) expect(Math.abs(mean - 1)).toBeLessThan(TOLERANCE)
  })

  it('of all agents one after the other end in a right reading', () => {
    const simulation = simulateOn(clusters, 'rolling')
    simulation.run(90_000)
    for (let agent = 0; agent < clusters.nodes; agent++) {
      restart(simulation, agent)
      simulation.run(6_000)
    }
    simulation.run(40_000)
    expectRight('40 s after a rolling restart', look(simulation, MINUTE_MS))
  })
})

describe('joins and leaves', () => {
  it('of 20 % per hour, for an hour: readings half a minute after each are right', () => {
    const spare = 8
    const nodes = 40
    const graph = randomRegular(nodes, 6, createRandom('churn'))
    const simulation = simulateOn(fromEdges(nodes + spare, edgesOf(graph)), 'churn')
    for (let agent = nodes; agent < nodes + spare; agent++) simulation.stop(agent)
    const random = createRandom('who')
    const gone = new Set<number>()
    simulation.run(90_000)
    for (let turn = 0; turn < spare; turn++) {
      const comes = nodes + turn
      simulation.start(comes)
      while (simulation.liveLinks().filter(({ a, b }) => a === comes || b === comes).length < 6) {
        const other = Math.floor(random.uniform() * comes)
        if (!gone.has(other)) simulation.join(other, comes)
      }
      simulation.run(45_000)
      expectRight(`joins, ${turn + 1}`, look(simulation, MINUTE_MS))
      const goes = Math.floor(random.uniform() * nodes)
      if (gone.has(goes)) continue
      gone.add(goes)
      leave(simulation, goes)
      simulation.run(45_000)
      expectRight(`leaves, ${turn + 1}`, look(simulation, MINUTE_MS))
      simulation.run(4 * MINUTE_MS)
    }
  })
})

describe('partitions', () => {
  const crossing = edgesOf(clusters).filter(([a, b]) => a < 18 !== b < 18)

  it('of an hour are read as none between the halves, and heal by themselves', () => {
    const simulation = simulateOn(clusters, 'split')
    simulation.run(90_000)
    for (const [a, b] of crossing) simulation.cut(a, b)
    simulation.run(60_000)
    let most = 0
    simulation.onEstimate = ({ lambda2 }) => {
      most = Math.max(most, lambda2 ?? 0)
    }
    simulation.run(58 * MINUTE_MS)
    simulation.onEstimate = null
    expect(most).toBeLessThan(0.02)
    for (const [a, b] of crossing) simulation.join(a, b)
    simulation.run(60_000)
    expectRight('a minute after an hour’s split was healed', look(simulation, MINUTE_MS))
  })

  it('in three are read as such, and heal by themselves', () => {
    const graph = clustersInRow({ perCluster: 12, degree: 5, joints: [3, 4] }, createRandom('three'))
    const between = edgesOf(graph).filter(([a, b]) => Math.floor(a / 12) !== Math.floor(b / 12))
    const simulation = simulateOn(graph, 'three')
    simulation.run(120_000)
    for (const [a, b] of between) simulation.cut(a, b)
    simulation.run(90_000)
    expect(simulation.estimate!.lambda2!).toBeLessThan(0.02)
    for (const [a, b] of between) simulation.join(a, b)
    simulation.run(120_000)
    expectRight('two minutes after a split in three was healed', look(simulation, MINUTE_MS))
  })

  it('that were never one: two overlays merged are read as one', () => {
    const apart = fromEdges(36, edgesOf(clusters).filter(([a, b]) => a < 18 === b < 18) as Edge[])
    const simulation = simulateOn(apart, 'merged')
    simulation.run(120_000)
    expect(simulation.estimate!.lambda2!).toBeLessThan(0.02)
    for (const [a, b] of crossing) simulation.join(a, b)
    simulation.run(90_000)
    expectRight('a minute and a half after two overlays were merged', look(simulation, MINUTE_MS))
  })
})

/** With closing frames, and out of the count. */
function leave(simulation: Simulation, agent: number): void {
  for (const { a, b } of simulation.liveLinks()) if (a === agent || b === agent) simulation.cut(a, b)
  simulation.run(2_000)
  simulation.stop(agent)
  simulation.leftOut.push(simulation.agents[agent]!.node.agentId)
}
