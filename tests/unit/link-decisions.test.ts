import { describe, expect, test } from 'vitest'
import { backoffMs } from '@/agent/backoff'
import { type AdmissionCase, judgeAdmission } from '@/agent/link/admission'
import { Neighbours } from '@/agent/link/neighbours'
import { createRandom } from '@/lib/method/random'

const candidate: AdmissionCase = {
  role: 'listener',
  isKnown: true,
  isBanned: false,
  acceptUnknown: true,
  incarnation: 'second',
  isRetired: false,
  shut: null,
  isFull: false,
  opened: 7,
  latest: null,
}

describe('whether a proven peer may have a link', () => {
  const cases: [string, Partial<AdmissionCase>, ReturnType<typeof judgeAdmission>][] = [
    ['a known neighbour that dials', {}, null],
    ['an unknown agent that dials, where such are taken', { isKnown: false }, null],
    [
      'an unknown agent that dials, where such are not taken',
      { isKnown: false, acceptUnknown: false },
      'not-a-neighbour',
    ],
    ['a removed neighbour that dials', { isKnown: false, isBanned: true }, 'not-a-neighbour'],
    ['an agent that was dialed', { role: 'dialer' }, null],
    ['an agent that was removed while it was dialed', { role: 'dialer', isKnown: false }, 'not-a-neighbour'],
    ['the same start on a further connection', { latest: { incarnation: 'second', opened: 9 } }, null],
    ['a later start, opened later', { latest: { incarnation: 'first', opened: 6 } }, null],
    [
      'a start whose connection was opened before the one of the newest start',
      { latest: { incarnation: 'third', opened: 8 } },
      'stale-incarnation',
    ],
    [
      'a start that was replaced and comes back on a new connection',
      { isRetired: true, latest: { incarnation: 'third', opened: 6 } },
      'stale-incarnation',
    ],
    ['an agent that the orders shut out', { shut: 'revoked' }, 'revoked'],
    [
      'the same when it was dialed, and whatever else there is to say',
      { role: 'dialer', shut: 'left-overlay', isRetired: true },
      'left-overlay',
    ],
    ['one agent more than there may be', { isFull: true }, 'too-many-links'],
    [
      'a stranger where there are enough',
      { isFull: true, isKnown: false, acceptUnknown: false },
      'not-a-neighbour',
    ],
    [
      'the same when it was dialed',
      { role: 'dialer', latest: { incarnation: 'third', opened: 8 } },
      'stale-incarnation',
    ],
  ]
  test.each(cases)('%s', (_, over, expected) => {
    expect(judgeAdmission({ ...candidate, ...over })).toBe(expected)
  })
})

describe('neighbours', () => {
  test('an address and an id told one after the other are one neighbour', () => {
    const neighbours = new Neighbours()
    neighbours.add({ agentId: 'gul-04' })
    neighbours.add({ agentId: 'gul-04', address: 'ws://gul-04.example:4711' })
    expect([...neighbours.all]).toEqual([
      { agentId: 'gul-04', address: 'ws://gul-04.example:4711', idIsGiven: true, quality: 1 },
    ])
  })

  test('one that moved keeps its identity under the new address', () => {
    const neighbours = new Neighbours()
    neighbours.add({ agentId: 'gul-04', address: 'ws://old.example:1' })
    neighbours.add({ agentId: 'gul-04', address: 'ws://new.example:1' })
    expect([...neighbours.all].map(({ address }) => address)).toEqual(['ws://new.example:1'])
  })

  test('a removed agent is refused until it is added again', () => {
    const neighbours = new Neighbours()
    neighbours.ban('gul-04')
    expect(neighbours.isBanned('gul-04')).toBe(true)
    neighbours.add({ agentId: 'gul-04' })
    expect(neighbours.isBanned('gul-04')).toBe(false)
  })

  test('neither address nor id is nobody', () => {
    expect(() => new Neighbours().add({})).toThrow(TypeError)
  })
})

test('waits double to the cap, and no two agents wait alike', () => {
  const random = createRandom('backoff')
  const waits = [0, 1, 2, 3, 10, 1_000].map((failures) =>
    backoffMs(failures, { baseMs: 100, capMs: 800 }, random),
  )
  const wholes = [100, 200, 400, 800, 800, 800]
  for (const [at, whole] of wholes.entries()) {
    expect(waits[at]).toBeGreaterThanOrEqual(whole / 2)
    expect(waits[at]).toBeLessThanOrEqual(whole)
  }
  expect(new Set(waits).size).toBe(waits.length)
})
