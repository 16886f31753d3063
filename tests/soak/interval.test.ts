import { UndirectedGraph } from 'graphology'
import { florentineFamilies } from 'graphology-generators/social'
import { afterAll, describe, expect, it } from 'vitest'
import { fromGraphology } from '@/lib/method/graph'
import {
  clustersInRow,
  complete,
  dumbbell,
  hubOnRegular,
  preferentialAttachment,
  randomRegular,
  ring,
  torus,
  tree,
  twoClusters,
} from '@/lib/method/graphs'
import { createRandom } from '@/lib/method/random'
import { emptyTally, lineOf, merge, quantile, type Tally, tallyRun } from '../support/interval-tally'

const RUNS = Number(process.env.THINSPAN_SOAK_RUNS ?? 16)
const RUN_MS = 90_000

/** None of them was looked at when the interval's constants were chosen. */
const graphs = {
  'Florentine families, 15': fromGraphology(florentineFamilies(UndirectedGraph)).graph,
  'dumbbell 2×K8, 3 bridges': dumbbell(8, 3),
  'two clusters of 12, 3 links': twoClusters({ perSide: 12, degree: 4, links: 3 }, createRandom('check 1')),
  'two clusters of 20, 5 links': twoClusters({ perSide: 20, degree: 5, links: 5 }, createRandom('check 2')),
  'random 4-regular, 30': randomRegular(30, 4, createRandom('check 3')),
  'random 8-regular, 36': randomRegular(36, 8, createRandom('check 4')),
  'preferential attachment, 50': preferentialAttachment(50, 2, createRandom('check 5')),
  'hub of degree 20 on 4-regular, 31': hubOnRegular(
    { nodes: 30, degree: 4, hubDegree: 20 },
    createRandom('check 6'),
  ),
  'ternary tree, 25': tree(25, 3),
  'ring, 16': ring(16),
  'torus 4×7': torus(4, 7),
  'complete, 12': complete(12),
  'three of 10 in a row': clustersInRow(
    { perCluster: 10, degree: 4, joints: [2, 3] },
    createRandom('check 7'),
  ),
}

describe('the interval under churn', () => {
  const tallies: Tally[] = []
  const say = (name: string, tally: Tally) => process.stdout.write(`${name.padEnd(34)} ${lineOf(tally)}\n`)

  it.each(Object.entries(graphs))('is looked at on %s', (name, graph) => {
    const tally = emptyTally()
    for (let run = 0; run < RUNS; run++) tallyRun(graph, `check ${name} ${run}`, RUN_MS, tally)
    tallies.push(tally)
    say(name, tally)
    expect(tally.freshMs).toBeGreaterThan(0.5 * tally.readMs)
  })

  afterAll(() => {
    if (tallies.length > 0) say('all', merge(tallies))
  })

  it(`holds λ₂ 85 to 95 % of the time over ${RUNS * Object.keys(graphs).length} runs, half-width at most 5 %`, () => {
    const all = merge(tallies)
    expect(all.runs).toBe(RUNS * Object.keys(graphs).length)
    expect(all.heldMs / all.freshMs).toBeGreaterThanOrEqual(0.85)
    expect(all.heldMs / all.freshMs).toBeLessThanOrEqual(0.95)
    expect(quantile(all.halfWidths, 0.5)).toBeLessThanOrEqual(0.05)
    expect(all.offMs / all.freshMs).toBeLessThan(0.005)
  })
})
