import { describe, expect, test } from 'vitest'
import type { Report } from '@/lib/method/report'
import {
  CLOSE,
  closeName,
  enrolRequestSchema,
  enrolText,
  generateKeys,
  ordersSchema,
  reportSchema,
  sessionRequestSchema,
  signText,
  verifyText,
} from '@/lib/protocol'
import { someOrders } from '../support/frames'

const counters = {
  seeded: 200,
  births: 3,
  kills: 2,
  culls: 0,
  dropped: 0,
  sent: 40,
  received: 38,
  walkerTime: 1_024,
  occupancyX: 99,
  occupancyY: 0,
  linkTime: 12,
}
const colony = { colony: 0, seeding: 9, present: 1, counters, heldX: 199, heldY: 0, mean: -77 }
const report: Report = {
  incarnation: 'incarnation-1',
  number: 1,
  ordersSequence: 7,
  sums: {
    attached: 1,
    colonies: [colony],
    energies: [5],
    moments: [6],
    linkEnds: 2,
    linkEndWeight: 2_048,
    sweep: { id: 7, above: [1, 0], crossing: [2, 0], crossingWeight: [2_048, 0] },
  },
  node: {
    degree: 2,
    weightedDegree: 2,
    linksKnown: 3,
    value: { sweep: 7, value: -1.25 },
    links: [{ peer: 'agent-gul-04', weight: 1, share: 0.2 }],
    version: '0.1.0',
    uptimeSeconds: 5,
  },
}

const health = {
  clockSkewMs: -3.5,
  reportTookMs: null,
  reportsFailed: 0,
  ticks: 18_000,
  ticksLate: 12,
  lastError: 'The collector did not answer.',
  linkKind: 'path' as const,
  withoutAgent: 1,
  source: { kind: 'static', error: null },
  weakestWeight: 0.5,
  meanWeight: null,
  keyRing: 1,
  refused: 0,
  upgrade: { version: '0.2.0', state: 'taken' as const, error: null },
}
const withNode = (over: object) => ({ ...report, node: { ...report.node, ...over } })
const withHealth = (over: object) => withNode({ health: { ...health, ...over } })

const withSums = (over: object) => ({ ...report, sums: { ...report.sums, ...over } })
const withCounter = (name: string, value: unknown) =>
  withSums({ colonies: [{ ...colony, counters: { ...counters, [name]: value } }] })

describe('a report', () => {
  test('says of a rehearsal what it counts, and whether it may', () => {
    const placed = {
      place: 1,
      id: 7,
      above: [1],
      crossing: [2],
      crossingWeight: [2_048],
      linkEnds: 2,
      alone: 0,
    }
    const told = {
      ...withSums({ sweeps: [placed] }),
      node: { ...report.node, skills: ['rehearsal', 'later'] },
    }
    expect(reportSchema.parse(told)).toEqual(told)
    expect(reportSchema.safeParse(withSums({ sweeps: [{ ...placed, alone: 2 }] })).success).toBe(false)
    expect(reportSchema.safeParse(withSums({ sweeps: [{ ...placed, above: [1, 0] }] })).success).toBe(false)
  })

  test('as an agent writes it is taken whole', () => {
    expect(reportSchema.parse(JSON.parse(JSON.stringify(report)))).toEqual(report)
  })

  test('says how its agent fares and what it can do', () => {
    const told = withNode({ health, skills: ['rehearsal', 'later'] })
    expect(reportSchema.parse(JSON.parse(JSON.stringify(told)))).toEqual(told)
    expect(reportSchema.parse(withHealth({ neighbours: ['agent-gul-04'] })).node.health).toEqual(health)
  })

  test('has its texts measured in characters, not in the units of UTF-16', () => {
    const told = withNode({ version: '🌊'.repeat(40) })
    expect(reportSchema.parse(told)).toEqual(told)
  })

  test('that is wrong all over is told so in a few places', () => {
    const { error } = reportSchema.safeParse({
      ...withSums({ colonies: Array(5).fill(0) }),
      node: { ...report.node, links: Array(60).fill(0) },
    })
    expect(error?.issues.length).toBeLessThanOrEqual(40)
    expect(error?.issues.map(({ path }) => path.join('.'))).toContain('node.links.0')
  })

  test('is taken without what it has no business to say', () => {
    const more = (of: object) => ({ ...of, neighbours: ['agent-gul-04'] })
    const sweep = more(report.sums.sweep!)
    const told = withSums({ ...more({}), sweep, colonies: [more({ ...colony, counters: more(counters) })] })
    expect(reportSchema.parse(told)).toEqual(report)
  })

  const bad: [string, unknown, string][] = [
    ['a counter that is not a number', withCounter('births', Number.NaN), 'sums.colonies.0.counters.births'],
    ['an infinite counter', withCounter('sent', Number.POSITIVE_INFINITY), 'sums.colonies.0.counters.sent'],
    ['a negative counter', withCounter('kills', -1), 'sums.colonies.0.counters.kills'],
    ['a fraction of a walker', withCounter('culls', 0.5), 'sums.colonies.0.counters.culls'],
    [
      'a counter beyond exact integers',
      withCounter('received', 2 ** 53),
      'sums.colonies.0.counters.received',
    ],
    ['a counter as text', withCounter('seeded', '200'), 'sums.colonies.0.counters.seeded'],
    ['no sums', { ...report, sums: null }, 'sums'],
    ['a list in place of a colony', withSums({ colonies: [[]] }), 'sums.colonies.0'],
    ['no counters', withSums({ colonies: [{ ...colony, counters: undefined }] }), 'sums.colonies.0.counters'],
    [
      'a colony in a slot there is not',
      withSums({ colonies: [{ ...colony, colony: 0x1_0000 }] }),
      'sums.colonies.0.colony',
    ],
    ['colonies that are no list', withSums({ colonies: 5 }), 'sums.colonies'],
    ['an energy that is no number', withSums({ energies: [null] }), 'sums.energies.0'],
    [
      'a mean beyond exact integers',
      withSums({ colonies: [{ ...colony, mean: -(2 ** 53) }] }),
      'sums.colonies.0.mean',
    ],
    ['no sweep and no null', withSums({ sweep: undefined }), 'sums.sweep'],
    [
      'more thresholds than allowed',
      withSums({ sweep: { id: 7, above: Array(200).fill(0), crossing: [], crossingWeight: [] } }),
      'sums.sweep.above',
    ],
    [
      'a node on neither side',
      withSums({ sweep: { id: 7, above: [2], crossing: [0], crossingWeight: [0] } }),
      'sums.sweep.above.0',
    ],
    ['too few energies', withSums({ energies: [] }), 'sums.energies'],
    ['too many moments', withSums({ moments: [1, 2, 3] }), 'sums.moments'],
    ['energies of a detached agent', withSums({ attached: 0, moments: [] }), 'sums.energies'],
    [
      'one colony twice',
      withSums({ colonies: [colony, colony], energies: [1, 2, 3], moments: [1, 2, 3] }),
      'sums.colonies',
    ],
    [
      'a sweep of unequal lists',
      withSums({ sweep: { id: 7, above: [1], crossing: [], crossingWeight: [1] } }),
      'sums.sweep',
    ],
    [
      'more links than allowed',
      { ...report, node: { ...report.node, links: Array(5_000).fill(report.node.links[0]) } },
      'node.links',
    ],
    ['no node', { ...report, node: 'gul-04' }, 'node'],
    ['a degree that is no number', withNode({ degree: '2' }), 'node.degree'],
    [
      'an infinite weighted degree',
      withNode({ weightedDegree: Number.POSITIVE_INFINITY }),
      'node.weightedDegree',
    ],
    [
      'a value that is not a number',
      withNode({ value: { sweep: 7, value: Number.NaN } }),
      'node.value.value',
    ],
    ['neither a value nor null', withNode({ value: undefined }), 'node.value'],
    [
      'a weight over one',
      withNode({ links: [{ peer: 'a', weight: 1.1, share: null }] }),
      'node.links.0.weight',
    ],
    ['a negative share', withNode({ links: [{ peer: 'a', weight: 1, share: -0.1 }] }), 'node.links.0.share'],
    ['a link to nobody', withNode({ links: [{ peer: '', weight: 1, share: null }] }), 'node.links.0.peer'],
    ['a long version', withNode({ version: '1'.repeat(41) }), 'node.version'],
    ['a skill that is no text', withNode({ skills: [5] }), 'node.skills.0'],
    ['more skills than allowed', withNode({ skills: Array(17).fill('rehearsal') }), 'node.skills'],
    ['a kind of link there is not', withHealth({ linkKind: 'rope' }), 'node.health.linkKind'],
    ['a long error', withHealth({ lastError: 'x'.repeat(301) }), 'node.health.lastError'],
    ['a negative time', withHealth({ reportTookMs: -1 }), 'node.health.reportTookMs'],
    ['ticks by halves', withHealth({ ticks: 0.5 }), 'node.health.ticks'],
    ['a source without a kind', withHealth({ source: { error: null } }), 'node.health.source.kind'],
    [
      'an unknown end of an upgrade',
      withHealth({ upgrade: { ...health.upgrade, state: 'lost' } }),
      'node.health.upgrade.state',
    ],
    ['a version of too many characters', withNode({ version: '⚓'.repeat(41) }), 'node.version'],
    ['no incarnation', { ...report, incarnation: '' }, 'incarnation'],
    ['number 0', { ...report, number: 0 }, 'number'],
  ]
  test.each(bad)('with %s is refused where it is wrong', (_, input, path) => {
    const result = reportSchema.safeParse(input)
    expect(result.success ? [] : result.error.issues.map((issue) => issue.path.join('.'))).toEqual([path])
  })
})

describe('orders of a rehearsal', () => {
  const [first, ...others] = someOrders().colonies
  const terms = [{ colony: 0, seeding: 4, coefficient: 0.5 }]
  const sweep = { id: 7, terms, mean: 0.1, norm: 2, thresholds: [-0.5, 0.5], lambda2: 0.3, nodes: 12 }
  const orders = (own: object) => ({
    ...someOrders(),
    colonies: [
      { ...first, cloneOf: { colony: 1, seeding: 4 }, refusedLinks: [['agent-tar-01', 'agent-gul-04']], own },
      ...others,
    ],
    sweeps: [{ ...sweep, place: 2 }],
  })
  const own = { linkTimePerSecond: 2, next: { linkTimePerSecond: 3, fromAgeMs: 700 } }

  test('are taken whole', () => {
    expect(ordersSchema.parse(JSON.parse(JSON.stringify(orders(own))))).toEqual(orders(own))
  })

  test('may not have one colony walk more link time per tick than can be walked, now or later', () => {
    const { tickMs } = someOrders().pace
    const tooFast = 4_100 / tickMs
    expect(ordersSchema.safeParse(orders({ linkTimePerSecond: tooFast })).success).toBe(false)
    const next = { linkTimePerSecond: tooFast, fromAgeMs: 0 }
    expect(ordersSchema.safeParse(orders({ linkTimePerSecond: 1, next })).success).toBe(false)
  })
})

describe('orders', () => {
  test('as a collector writes them are taken whole', () => {
    expect(ordersSchema.parse(JSON.parse(JSON.stringify(someOrders())))).toEqual(someOrders())
  })

  test.each([
    ['two colonies in one slot', { colonies: [someOrders().colonies[0], someOrders().colonies[0]] }],
    ['a negative rate of link time', { linkTimePerSecond: -1 }],
    ['a pace without ticks', { pace: { tickMs: 0, intervalMs: 200 } }],
    ['sequence 0', { sequence: 0 }],
  ])('with %s are refused', (_, over) => {
    expect(ordersSchema.safeParse({ ...someOrders(), ...over }).success).toBe(false)
  })
})

describe('enrolment', () => {
  const keys = generateKeys()
  const asked = { code: 'one-two-three', name: 'tar-01', publicKey: keys.publicKey }
  const request = {
    ...asked,
    labels: { office: 'Pinnet Bay' },
    address: 'ws://10.0.0.7:4711',
    version: '0.1.0',
    signature: signText(keys.privateKey, enrolText(asked)),
  }

  test('a request as an agent writes it is taken, and its signature holds', () => {
    expect(enrolRequestSchema.parse(request)).toEqual(request)
    expect(verifyText(keys.publicKey, enrolText(request), request.signature)).toBe(true)
  })

  test('a signature holds for this code and name alone', () => {
    expect(verifyText(keys.publicKey, enrolText({ ...request, code: 'another' }), request.signature)).toBe(
      false,
    )
    expect(verifyText(keys.publicKey, enrolText({ ...request, name: 'gul-04' }), request.signature)).toBe(
      false,
    )
    expect(verifyText(generateKeys().publicKey, enrolText(request), request.signature)).toBe(false)
  })

  test.each([
    ['a name over two lines', { name: 'tar\n01' }],
    ['an empty name', { name: '' }],
    ['a key of the wrong length', { publicKey: 'AAAA' }],
    ['an address of another kind', { address: 'http://10.0.0.7' }],
    ['a label key with a space', { labels: { 'the office': 'x' } }],
    [
      'too many labels',
      { labels: Object.fromEntries(Array.from({ length: 40 }, (_, at) => [`k${at}`, 'v'])) },
    ],
    ['a signature that is too short', { signature: 'AAAA' }],
  ])('with %s is refused', (_, over) => {
    expect(enrolRequestSchema.safeParse({ ...request, ...over }).success).toBe(false)
  })

  test('a session is asked for at a moment, not at a mood', () => {
    const session = { agentId: 'a', nonce: 'A'.repeat(22), signature: request.signature }
    expect(sessionRequestSchema.safeParse({ ...session, at: 'soon' }).success).toBe(false)
    expect(sessionRequestSchema.safeParse({ ...session, at: '2031-05-06T12:00:00.000Z' }).success).toBe(true)
  })
})

test('every close code is one of its own, in the range kept for applications', () => {
  const codes = Object.values(CLOSE).map(({ code }) => code)
  expect(new Set(codes).size).toBe(codes.length)
  for (const [name, { code, sentence }] of Object.entries(CLOSE)) {
    expect(code).toBeGreaterThanOrEqual(4400)
    expect(code).toBeLessThan(5000)
    expect(sentence).toMatch(/^[A-Z].*\.$/)
    expect(closeName(code)).toBe(name)
  }
  expect(closeName(1006)).toBeNull()
})
