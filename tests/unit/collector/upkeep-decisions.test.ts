import { describe, expect, it } from 'vitest'
import { fleetFacts } from '@/lib/collector/fleet-facts'
import { keyStep, ringsToSend } from '@/lib/collector/key-turn'
import { offerFor } from '@/lib/collector/offers'
import { type RetireInput, toRetire } from '@/lib/collector/retire'
import { imbalanceOf } from '@/lib/data/node-health'
import { countsOf, type Standing } from '@/lib/data/upgrade-counts'
import { generateKeys, upgradeText, verifyText } from '@/lib/protocol'
import { healthyReport, someReport } from '@/tests/support/reports'

const HOUR = 3_600_000
const NOW = 1_000 * HOUR

describe('retiring the long unheard', () => {
  const agent = (agentId: string, heardHoursAgo: number | null, joinedHoursAgo = 500) => ({
    agentId,
    joinedAtMs: NOW - joinedHoursAgo * HOUR,
    heard: heardHoursAgo === 0,
    heardAtMs: heardHoursAgo === null ? null : NOW - heardHoursAgo * HOUR,
  })
  const heard = (count: number) => Array.from({ length: count }, (_, index) => agent(`heard-${index}`, 0))
  const retired = (agents: RetireInput['agents'], over: Partial<RetireInput> = {}) =>
    toRetire({
      agents,
      limitMs: 24 * HOUR,
      atMs: NOW,
      listeningSinceMs: NOW - 100 * HOUR,
      treatAsSplit: false,
      intervalMs: 2_000,
      ...over,
    })

  it('takes those over the limit, the longest unheard first, and those never heard since they joined', () => {
    const agents = [
      ...heard(9),
      agent('day', 25),
      agent('week', 168),
      agent('hour', 1),
      agent('never', null, 30),
    ]
    expect(retired(agents)).toEqual(['week', 'never', 'day'])
    expect(retired([...heard(9), agent('new', null, 23)])).toEqual([])
  })

  it('leaves two at least', () => {
    expect(retired([...heard(2), agent('gone', 30)])).toEqual(['gone'])
    expect(retired([...heard(1), agent('gone', 30)])).toEqual([])
  })

  it('waits while the overlay is to be treated as split, and while half or fewer are heard', () => {
    const agents = [...heard(9), agent('gone', 30)]
    expect(retired(agents, { treatAsSplit: true })).toEqual([])
    expect(retired([...heard(3), agent('a', 30), agent('b', 40), agent('c', 50)])).toEqual([])
    expect(retired([...heard(4), agent('a', 30), agent('b', 40), agent('c', 50)])).toEqual(['c', 'b', 'a'])
    expect(retired([agent('a', 30), agent('b', 40)])).toEqual([])
  })

  it('waits an hour after a pause in listening, in which everybody fell silent', () => {
    const agents = [...heard(9), agent('gone', 30)]
    expect(retired(agents, { listeningSinceMs: NOW - 0.9 * HOUR })).toEqual([])
    expect(retired(agents, { listeningSinceMs: NOW - 1.1 * HOUR })).toEqual(['gone'])
    expect(retired(agents, { listeningSinceMs: null })).toEqual([])
  })

  it('keeps a third that fell silent together, label or none: that may be a partition', () => {
    const together = ['a', 'b', 'c', 'd'].map((name) => agent(name, 30))
    expect(retired([...heard(8), ...together, agent('alone', 40)])).toEqual(['alone'])
    expect(retired([...heard(36), ...together])).toEqual(['a', 'b', 'c', 'd'])
  })
})

describe('a rotation of the signing key', () => {
  const next = { publicKey: 'n', state: 'next' as const, untilMs: 100, ringVersion: 4 }
  const previous = { publicKey: 'p', state: 'previous' as const, untilMs: 50, ringVersion: 5 }
  const holding = (...rings: (number | null)[]) => rings.map((keyRing) => ({ keyRing }))
  const table: [string, ReturnType<typeof keyStep>, ReturnType<typeof keyStep>][] = [
    ['waits for the last agent heard', keyStep([next], holding(4, 5, 3), 10), null],
    ['goes on when all heard hold the ring', keyStep([next], holding(4, 5, 4), 10), 'take-over'],
    ['waits for agents of version 1, which never say so', keyStep([next], holding(4, null), 10), null],
    ['goes on without them when its time has come', keyStep([next], holding(4, null), 100), 'take-over'],
    ['does not take silence for consent', keyStep([next], [], 10), null],
    ['keeps a previous key while passes under it are good', keyStep([previous], holding(4), 49), null],
    ['drops it then', keyStep([previous], holding(4), 50), 'drop'],
    ['has nothing to do without keys', keyStep([], holding(1), 10), null],
  ]
  it.each(table)('%s', (_, step, expected) => expect(step).toBe(expected))

  it('sends of many rings the first and the last', () => {
    const rings = Array.from({ length: 50 }, (_, index) => index)
    expect(ringsToSend(rings.slice(0, 20))).toEqual(rings.slice(0, 20))
    expect(ringsToSend(rings)).toEqual([...rings.slice(0, 10), ...rings.slice(40)])
  })
})

describe('an upgrade offer', () => {
  const keys = generateKeys()
  const { d } = keys.privateKey.export({ format: 'jwk' })
  const offer = (version: string, labelKey: string | null = null, labelValue: string | null = null) => ({
    version,
    sha256: 'ab'.repeat(32),
    labelKey,
    labelValue,
    teamId: 'harbourline',
  })
  const facts = (...offers: ReturnType<typeof offer>[]) => ({
    overlayId: 'tides',
    publicKey: keys.publicKey,
    privateKey: d!,
    ordersText: null,
    ordersKey: null,
    ordersSignature: null,
    ageMs: 0,
    ringVersion: 1,
    offers,
  })

  const theirs = { labels: {}, teamId: 'harbourline' }

  it('is for the agents of one team', () => {
    expect(offerFor(facts(offer('0.3.0')), { ...theirs, teamId: 'skerry' }, { version: '0.1.0' })).toBeNull()
  })

  it('goes to agents with its label, the newest that fits, signed, and not to those that run it', () => {
    const offered = facts(offer('0.3.0', 'harbour', 'Tarnwick'), offer('0.2.0'))
    const at = (harbour: string, version: string) =>
      offerFor(offered, { labels: { harbour }, teamId: 'harbourline' }, { version })?.version ?? null
    expect([
      at('Tarnwick', '0.1.0'),
      at('Tarnwick', '0.3.0'),
      at('Eelholm', '0.1.0'),
      at('Eelholm', '0.2.0'),
    ]).toEqual(['0.3.0', null, '0.2.0', null])
    expect(offerFor(facts(), theirs, { version: '0.1.0' })).toBeNull()
    const made = offerFor(facts(offer('0.3.0+b')), theirs, { version: '0.1.0' })!
    expect(made.path).toBe('/agent/thinspan-agent.mjs?version=0.3.0%2Bb')
    expect(verifyText(made.key, upgradeText('tides', made), made.signature)).toBe(true)
  })

  it('is counted by what became of it', () => {
    const standing = (
      version: string,
      heard: boolean,
      state: NonNullable<Standing['upgrade']>['state'] | null,
    ) => ({
      labels: {},
      teamId: 'harbourline',
      version,
      heard,
      upgrade: state && { version: '0.3.0', state, error: null },
    })
    expect(
      countsOf('0.3.0', [
        standing('0.3.0', true, 'taken'),
        standing('0.3.0', false, null),
        standing('0.2.0', true, 'failed'),
        standing('0.2.0', true, 'declined'),
        standing('0.2.0', true, 'offered'),
        standing('0.2.0', true, null),
        standing('0.2.0', false, null),
      ]),
    ).toEqual({ offered: 7, runs: 2, failed: 1, declined: 1, waiting: 2 })
  })
})

describe('what agents say of themselves', () => {
  const agent = (agentId: string, report = someReport(1), receivedAtMs = NOW) => ({
    agentId,
    name: agentId,
    labels: {},
    teamId: 'harbourline',
    joinedAtMs: 0,
    last: { report, receivedAtMs },
  })
  const facts = (...agents: ReturnType<typeof agent>[]) =>
    fleetFacts({ snapshot: { atMs: NOW, agents }, leftOut: 2 }, 2_000)
  const path = (withoutAgent: number) => healthyReport(1, { withoutAgent })
  const connection = healthyReport(1, { linkKind: 'connection' })

  it('is added up over those heard, and left out where none says it', () => {
    expect(facts(agent('a'))).toEqual({ leftOut: 2, linkKind: null })
    expect(facts(agent('a', path(2)), agent('b', path(1)), agent('c'))).toEqual({
      leftOut: 2,
      withoutAgent: 3,
      linkKind: 'path',
    })
    expect(facts(agent('a', path(0)), agent('b', connection)).linkKind).toBe('mixed')
    expect(facts(agent('a', path(0)), agent('b', connection, NOW - HOUR)).linkKind).toBe('path')
  })

  it('shows walkers that its books miss, whichever way and in whichever colony', () => {
    const { colonies } = someReport(3).sums
    const [colony] = colonies
    // Held 200 of 200 seeded, 30 born, 30 killed, 3 sent, 3 received.
    expect(imbalanceOf(colonies)).toBe(0)
    expect(
      imbalanceOf([
        { ...colony!, heldX: 107 },
        { ...colony!, heldY: 95 },
      ]),
    ).toBe(12)
    expect(imbalanceOf([])).toBeNull()
  })
})
