import { expect, it } from 'vitest'
import type { Round } from '@/lib/collector/leader-store'
import { BLANK_MEMORY, STATE_VERSION, type StoredState } from '@/lib/collector/memory'
import { Term } from '@/lib/collector/term'
import { Usual } from '@/lib/collector/usual'
import { initialControl } from '@/lib/method/control'
import { PACES } from '@/lib/method/pace'
import { createRandom } from '@/lib/method/random'
import { FakeClock } from '@/tests/support/fake-clock'

const log = { info: () => {}, warn: () => {}, error: () => {} }
const agent = {
  agentId: 'agent-1',
  name: 'tar-01',
  labels: {},
  teamId: 'harbourline',
  joinedAtMs: 0,
  last: null,
}

/** Two rounds of a new leader, whose look at the usual comes to `forkEm`. */
async function rounds(forkEm: () => Promise<never>) {
  const clock = new FakeClock()
  const stop = new AbortController()
  const written: Round[] = []
  const usual = new Usual({ forkEm, clock, log }, { overlayId: 'tides' })
  const state: StoredState = {
    version: STATE_VERSION,
    control: initialControl(0, PACES.steady),
    memory: { ...BLANK_MEMORY, usual: 0.66 },
  }
  const store = {
    claim: async () => ({ sequence: 4, state }),
    load: async () => ({
      pace: 'steady' as const,
      disclosure: 'named' as const,
      weights: 'unit' as const,
      retireAfterHours: null,
      shut: [],
      leftOutNames: [],
      rehearsals: [],
      floors: [],
      key: { publicKey: 'public', privateKey: 'private' },
      keysInTurn: [],
      snapshot: { atMs: clock.monotonicMs(), agents: [agent] },
    }),
    write: async (round: Round) => written.push(round) > 0,
  }
  const upkeep = { look: async () => {} }
  const moments = { look: async () => {} }
  const planned = { look: async () => {} }
  const exact = { look: async () => {}, latest: () => null }
  const term = new Term(
    { store, usual, upkeep, moments, planned, exact, clock, random: createRandom(1), log },
    { overlayId: 'tides' },
  )
  const ended = term.run(stop.signal)
  await clock.advance(PACES.steady.intervalMs)
  stop.abort()
  await clock.advance(PACES.steady.intervalMs)
  expect(await ended).toBe('stopped')
  return written
}

it('a new leader does not wait for the usual: until it is looked up, the one remembered counts', async () => {
  const written = await rounds(() => new Promise(() => {}))
  expect(written.map(({ sequence, state }) => [sequence, state.memory.usual])).toEqual([
    [5, 0.66],
    [6, 0.66],
  ])
  expect(written[0]?.reading?.usual).toBe(0.66)
})

it('a look at the usual that fails costs no round', async () => {
  const written = await rounds(() => Promise.reject(new Error('no database')))
  expect(written.map(({ state }) => state.memory.usual)).toEqual([0.66, 0.66])
})
