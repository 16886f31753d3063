import { describe, expect, it } from 'vitest'
import { twoClusters } from '@/lib/method/graphs'
import { createRandom } from '@/lib/method/random'
import { drainsOf, topologies } from '@/scripts/bench/rehearsal/cases'
import { runRehearsals } from '@/scripts/bench/rehearsal/course'

const drainsFor = (name: string, what: readonly string[]) => {
  const topology = topologies().find((each) => each.name.startsWith(name))
  if (!topology) throw new Error(`no topology ${name}`)
  const drains = drainsOf(topology, createRandom(`drain ${topology.name}`))
  return { topology, drains: drains.filter((drain) => what.includes(drain.what)) }
}

describe('a rehearsal, on simulated overlays', () => {
  it('reads what would remain within 5 %, in 90 s, with the links that cross, while the live reading stays within 2 %', () => {
    const { topology, drains } = drainsFor('two clusters', ['10 %', 'label'])
    const runs = runRehearsals(topology, drains, { seed: 'a', pace: 'brisk' })
    // Five links join the clusters; those at nodes that are taken away go with them.
    expect(runs.map(({ what, state, isApart, crossing }) => [what, state, isApart, crossing])).toEqual([
      ['10 %', 'settled', false, 4],
      ['label', 'settled', false, 3],
    ])
    for (const { reading, exact, seconds, liveOff } of runs) {
      expect(Math.abs((reading ?? 0) / exact - 1)).toBeLessThan(0.05)
      expect(seconds).toBeLessThan(90)
      expect(liveOff).toBeLessThan(0.02)
    }
  })

  it('reads one cluster alone, which is twenty times as firm as the whole, at a rate of its own', () => {
    const graph = twoClusters({ perSide: 10, degree: 4, links: 2 }, createRandom('rehearsed alone'))
    const side = Array.from({ length: 10 }, (_, node) => node)
    const topology = { name: 'two', graph, labels: [] }
    const [run] = runRehearsals(topology, [{ what: 'label', nodes: side }], { seed: 'a', pace: 'brisk' })
    // The clones all stood at one side with one type: the colonies are seeded anew.
    expect(run).toMatchObject({ state: 'settled', isApart: false, isCold: true })
    expect(Math.abs((run?.reading ?? 0) / (run?.exact ?? 1) - 1)).toBeLessThan(0.05)
    expect(run?.liveOff).toBeLessThan(0.02)
  })

  it('says that what remains falls apart', () => {
    const { topology, drains } = drainsFor('Zachary', ['label'])
    expect(runRehearsals(topology, drains, { seed: 'a', pace: 'brisk' })).toMatchObject([
      { state: 'settled', isApart: true, exact: 0 },
    ])
  })
})
