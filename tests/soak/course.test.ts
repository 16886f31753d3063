import { describe, expect, it } from 'vitest'
import { preferentialAttachment, randomRegular, tree, twoClusters } from '@/lib/method/graphs'
import { createRandom } from '@/lib/method/random'
import { exactLambda2, simulateOn } from '../support/overlays'

const HOURS = Number(process.env.THINSPAN_SOAK_HOURS ?? 6)
const INCIDENT_MS = 150_000
/** After a change, readings have this long before they are judged. */
const ANSWER_MS = 90_000

const graphs = {
  'two clusters of 18': twoClusters({ perSide: 18, degree: 6, links: 5 }, createRandom('soak 1')),
  'random 6-regular, 60': randomRegular(60, 6, createRandom('soak 2')),
  'preferential attachment, 100': preferentialAttachment(100, 3, createRandom('soak 3')),
  'binary tree, 31': tree(31),
}

describe.each(Object.entries(graphs))('%s', (_, graph) => {
  it(`keeps fresh readings within 5 % through ${HOURS} simulated hours of restarts, weak links and losses`, () => {
    const simulation = simulateOn(graph, 'course', { reportLoss: 0.05, ordersLoss: 0.05 })
    const random = createRandom('incidents')
    const pick = (limit: number): number => Math.floor(random.uniform() * limit)
    let judged = 0
    let off = 0
    let worst = 0
    let exact = exactLambda2(simulation)
    let changedMs = 0
    simulation.onEstimate = ({ atMs, lambda2, settling }) => {
      if (lambda2 === null || settling || atMs - changedMs < ANSWER_MS) return
      judged += 1
      const error = Math.abs(lambda2 / exact - 1)
      worst = Math.max(worst, error)
      if (error > 0.05) off += 1
    }
    const incidents = [
      () => {
        const agent = pick(graph.nodes)
        simulation.stop(agent)
        simulation.run(4_000)
        simulation.start(agent)
      },
      () => {
        const links = simulation.liveLinks()
        const link = links[pick(links.length)]!
        simulation.weaken(link.a, link.b, [0.5, 0.8, 1][pick(3)]!)
      },
      () => {
        simulation.agents[pick(graph.nodes)]!.stalledUntilMs = simulation.nowMs + 6_000
      },
      () => {
        const { agents } = simulation
        const agent = agents[pick(agents.length)]!
        agent.silent = true
        simulation.run(20_000)
        agent.silent = false
      },
    ]
    while (simulation.nowMs < HOURS * 3_600_000) {
      incidents[pick(incidents.length)]!()
      changedMs = simulation.nowMs
      exact = exactLambda2(simulation)
      simulation.run(INCIDENT_MS)
    }
    process.stdout.write(`judged ${judged}, off ${off}, worst ${(100 * worst).toFixed(1)} %\n`)
    expect(judged).toBeGreaterThan(500)
    expect(off / judged).toBeLessThan(0.01)
  })
})
