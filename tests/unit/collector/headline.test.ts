import { describe, expect, it } from 'vitest'
import { type JudgedAgent, judge } from '@/lib/collector/judge'
import { BLANK_MEMORY, type Memory } from '@/lib/collector/memory'
import type { CoreEstimate, Estimate } from '@/lib/method/control'

const AT_MS = Date.UTC(2031, 4, 6, 12)
const agents: JudgedAgent[] = Array.from({ length: 20 }, (_, index) => ({
  agentId: `agent-${index}`,
  name: `tar-${index}`,
  labels: {},
  joinedAtMs: index,
  heard: true,
  heardAtMs: AT_MS,
  attached: true,
  value: { sweep: 7, value: index % 2 === 0 ? -1 : 1 },
}))
const estimate = (over: Partial<Estimate>): Estimate => ({
  atMs: AT_MS,
  withheld: null,
  lambda2: 0.8,
  low: 0.7,
  high: 0.9,
  lambda3AtMost: 4,
  crossCheck: 0.81,
  settling: false,
  settlesInMs: null,
  answersInMs: 20_000,
  singleCut: true,
  cut: { threshold: 2, sweep: 6, above: 1, below: 19, links: 1, weight: 1 },
  coverage: {
    joined: 20,
    heard: 20,
    prompt: 20,
    attached: 20,
    meanWeightedDegree: 6,
    linksMeasured: 60,
    linksKnown: 60,
    walkersHeard: 1,
  },
  seedings: [1, 2],
  ...over,
})
const within = (over: Partial<Estimate> = {}): CoreEstimate => ({
  estimate: estimate({
    lambda2: 2.8,
    low: 2.7,
    high: 2.9,
    lambda3AtMost: 3,
    seedings: [8],
    singleCut: false,
    ...over,
  }),
  ends: [{ agents: ['agent-19'], links: 1, weight: 1, degree: 1 }],
})
const judged = (core: CoreEstimate | null, memory: Memory = BLANK_MEMORY, isNamed = true) =>
  judge({
    estimate: estimate({}),
    core,
    isNamed,
    agents,
    memory,
    combination: 7,
    meanWeightedDegree: 6,
    usual: null,
    intervalMs: 2_000,
  })

describe('the headline of an overlay', () => {
  it('is the whole while nothing hangs loose', () => {
    const { reading } = judged(null)
    expect(reading).toMatchObject({ lambda2: 0.8, core: null, looseEnds: [] })
  })

  it('is the core once that has settled, and the whole is told beside it', () => {
    const { reading, memory } = judged(within())
    expect(reading).toMatchObject({
      lambda2: 0.8,
      low: 0.7,
      core: { lambda2: 2.8, low: 2.7, high: 2.9 },
      looseEnds: [{ nodes: 1, links: 1 }],
      level: 'firm',
      lambda3AtMost: 3,
      crossCheck: 0.81,
      seedings: [1, 2, 8],
    })
    expect(reading.detail).toContain('Told apart: tar-19 hangs on 1 link. With that the reading is 0.800.')
    expect(memory.last?.lambda2).toBe(2.8)
  })

  it('is still the whole while the core settles for the first time', () => {
    const { reading } = judged(within({ settling: true }))
    expect(reading).toMatchObject({ lambda2: 0.8, core: null, looseEnds: [{ nodes: 1, links: 1 }] })
    expect(reading.detail).toContain('tar-19 hangs on 1 link. What remains without that is being read.')
  })

  it('stays the core when that settles again later', () => {
    const { memory } = judged(within())
    expect(judged(within({ settling: true }), memory).reading).toMatchObject({
      core: { lambda2: 2.8 },
      data: 'settling',
      level: 'firm',
    })
  })

  it('begins trend and cut anew when it is of other nodes', () => {
    const before = judged(null).memory
    expect(before.cut).not.toBeNull()
    const { memory } = judged(within(), before)
    expect([memory.recent.length, memory.signSince]).toEqual([1, 7])
  })

  it('names nobody where links are not named', () => {
    expect(judged(within(), BLANK_MEMORY, false).reading.detail).toContain(
      'Told apart: 1 node hangs on 1 link.',
    )
  })

  it('is withheld with the whole', () => {
    const { reading } = judge({
      estimate: estimate({ withheld: 'unheard', lambda2: null, low: null, high: null, cut: null }),
      core: within(),
      agents: agents.map((agent, index) => ({ ...agent, heard: index < 10 })),
      memory: judged(within()).memory,
      combination: 7,
      meanWeightedDegree: 6,
      usual: null,
      intervalMs: 2_000,
    })
    expect(reading).toMatchObject({ lambda2: null, core: null, data: 'unheard', last: { lambda2: 2.8 } })
  })
})
