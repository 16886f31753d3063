import { expect, it } from 'vitest'
import type { Loaded, LoadedAgent, Round } from '@/lib/collector/leader-store'
import { Term } from '@/lib/collector/term'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import type { ColonyCounters, Report } from '@/lib/method/report'
import { FakeClock } from '@/tests/support/fake-clock'

const log = { info: () => {}, warn: () => {}, error: () => {} }
const counters: ColonyCounters = {
  seeded: 10,
  births: 0,
  kills: 0,
  culls: 0,
  dropped: 0,
  sent: 4,
  received: 0,
  walkerTime: 0,
  occupancyX: 0,
  occupancyY: 0,
  linkTime: 0,
}

function reportOf(number: number, heldX: number): Report {
  return {
    incarnation: 'one',
    number,
    ordersSequence: 0,
    sums: {
      attached: 1,
      colonies: [{ colony: 0, seeding: 99, present: 1, counters, heldX, heldY: 0, mean: 0 }],
      energies: [0],
      moments: [0],
      linkEnds: 3,
      linkEndWeight: 3_072,
      sweep: null,
    },
    node: {
      degree: 3,
      weightedDegree: 3,
      linksKnown: 3,
      value: null,
      links: [],
      version: '2.0.0',
      uptimeSeconds: 1,
    },
  }
}

it('an agent whose walkers do not add up is left out: shut in the orders, not joined, and named in the verdict', async () => {
  const clock = new FakeClock()
  const stop = new AbortController()
  const written: Round[] = []
  const names = ['tar-01', 'gul-04', 'pin-02', 'eel-09']
  const load = async (): Promise<Loaded> => {
    const atMs = clock.monotonicMs()
    const number = 1 + Math.floor(atMs / PACES.steady.intervalMs)
    const agents = names.map(
      (name): LoadedAgent => ({
        agentId: name,
        name,
        labels: {},
        teamId: 'harbourline',
        joinedAtMs: 0,
        last: { report: reportOf(number, name === 'gul-04' ? 600 : 6), receivedAtMs: atMs },
      }),
    )
    return {
      pace: 'steady',
      disclosure: 'named',
      weights: 'unit',
      retireAfterHours: null,
      shut: [],
      leftOutNames: [],
      rehearsals: [],
      floors: [],
      key: { publicKey: '', privateKey: '' },
      keysInTurn: [],
      snapshot: { atMs, agents },
    }
  }
  const store = {
    claim: async () => ({ sequence: 0, state: null }),
    load,
    write: async (round: Round) => written.push(round) > 0,
  }
  const components = {
    store,
    usual: { at: () => null },
    upkeep: { look: async () => {} },
    moments: { look: async () => {} },
    planned: { look: async () => {} },
    exact: { look: async () => {}, latest: () => null },
    clock,
    log,
  }
  const term = new Term({ ...components, random: createRandom(1) }, { overlayId: 'tides' })
  const ended = term.run(stop.signal)
  // In haste rounds come more often than these agents report.
  while (written.length < 50) await clock.advance(PACES.steady.intervalMs)
  stop.abort()
  await clock.advance(PACES.steady.intervalMs)
  expect(await ended).toBe('stopped')
  const round = written.find(({ leftOut }) => leftOut.length > 0)
  expect(round?.leftOut).toEqual([
    {
      agentId: 'gul-04',
      because: 'its walkers do not add up: it holds another number than its own counts say',
    },
  ])
  expect(round?.orders.shut).toEqual([{ agentId: 'gul-04', reason: 'left-out' }])
  expect(round?.reading?.coverage).toMatchObject({ joined: 3, leftOut: 1 })
  expect(round?.reading?.detail).toContain('gul-04 is left out: its walkers do not add up')
})
