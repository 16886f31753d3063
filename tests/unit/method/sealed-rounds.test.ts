import { describe, expect, it } from 'vitest'
import { DEFAULT_SETTINGS } from '@/lib/method/control'
import { edgesOf } from '@/lib/method/graph'
import { twoClusters } from '@/lib/method/graphs'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { Simulation } from '@/lib/method/simulate'
import { algebraicConnectivity } from '@/lib/method/spectrum'

const graph = twoClusters({ perSide: 8, degree: 4, links: 3 }, createRandom('sealed rounds'))
const exact = algebraicConnectivity(graph).lambda2

function sealed(masks: 'masked' | 'bare'): Simulation {
  const settings = { ...DEFAULT_SETTINGS, pace: PACES.steady, disclosure: 'sealed' as const }
  const links = edgesOf(graph).map(([a, b, weight]) => ({ a, b, weight }))
  return new Simulation(
    { random: createRandom('1') },
    { nodes: graph.nodes, links, settings, masks, audits: false },
  )
}

describe('an overlay whose sums are masked', () => {
  it('reads the same as one whose masks are nothing, and within 2 % of the exact value', () => {
    const readings = (['masked', 'bare'] as const).map((masks) => {
      const simulation = sealed(masks)
      simulation.run(80_000)
      return simulation.estimate!.lambda2!
    })
    expect(Math.abs(readings[0]! / readings[1]! - 1)).toBeLessThan(0.001)
    expect(Math.abs(readings[0]! / exact - 1)).toBeLessThan(0.02)
  })

  it('never takes links that agents may not count for links that are not there', () => {
    const simulation = sealed('masked')
    const counted = new Set<number>()
    simulation.onEstimate = ({ cut }) => {
      if (cut) counted.add(cut.links)
    }
    simulation.run(60_000)
    expect(counted.has(3)).toBe(true)
    expect(counted.has(0)).toBe(false)
  })

  it('goes on without neighbours that fall silent, within ten intervals', () => {
    const simulation = sealed('masked')
    simulation.run(60_000)
    expect(simulation.control.rounds?.last?.head.agents).toBe(16)
    simulation.stop(3)
    simulation.stop(12)
    const tookMs = simulation.runUntil(() => simulation.control.rounds?.last?.head.agents === 14, 60_000)
    expect(tookMs).not.toBeNull()
    expect(tookMs!).toBeLessThanOrEqual(20_000)
  })
})
