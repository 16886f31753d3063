import { beforeEach, describe, expect, it } from 'vitest'
import { POST as report } from '@/app/api/agent/report/route'
import { AgentSchema, AgentStateSchema, ControlSchema } from '@/entities'
import { Ingest } from '@/lib/collector/ingest'
import { storeStates } from '@/lib/collector/ingest-store'
import { systemClock } from '@/lib/collector/process'
import { sql } from '@/lib/db'
import { MAX_REPORT_BYTES, verifyPass } from '@/lib/protocol'
import {
  call,
  deliver,
  joinAgent,
  type Member,
  problemOf,
  seedCode,
  seedOverlay,
  sendReport,
} from '@/tests/support/collector'
import { someOrders } from '@/tests/support/frames'
import { overlayPerTest } from '@/tests/support/overlay-per-test'
import { someReport } from '@/tests/support/reports'

const seeded = overlayPerTest()

beforeEach(async () => {
  seeded.team.failures.length = 0
})

const stateOf = (member: Member) => seeded.em().findOne(AgentStateSchema, member.agentId)
const join = async (name = 'tar-01') =>
  joinAgent(await seedCode(seeded.team.database, seeded.overlay.id), name)

describe('a report', () => {
  it('that was answered is stored, and the answer carries the orders and their age', async () => {
    const member = await join()
    expect(await deliver(member, someReport(1))).toEqual({ orders: null, ordersAgeMs: 0 })
    expect(await stateOf(member)).toMatchObject({
      reportNumber: 1,
      sums: someReport(1).sums,
      node: someReport(1).node,
    })
    const orders = someOrders(5)
    await seeded.em().insert(ControlSchema, {
      overlayId: seeded.overlay.id,
      ordersText: JSON.stringify(orders),
      sequence: 5,
      updatedAt: new Date(Date.now() - 90),
    })
    const { orders: given, ordersAgeMs } = await deliver(member, someReport(2))
    expect(given).toEqual(orders)
    expect(ordersAgeMs).toBeGreaterThanOrEqual(90)
    expect((await stateOf(member))?.reportNumber).toBe(2)
  })

  it('older than what is held is a no-op that says so', async () => {
    const member = await join()
    await deliver(member, someReport(7))
    for (const number of [7, 3]) {
      const response = await sendReport(member, someReport(number))
      expect(await response.json()).toMatchObject({ repeated: true })
    }
    expect((await stateOf(member))?.reportNumber).toBe(7)
    await deliver(member, { ...someReport(1), incarnation: 'incarnation-2' })
    expect(await stateOf(member)).toMatchObject({ reportNumber: 1, incarnation: 'incarnation-2' })
  })

  it('of a former incarnation that arrives late is a no-op, whichever process takes it in', async () => {
    const member = await join()
    const of = (incarnation: string, number: number) => ({ ...someReport(number), incarnation })
    await deliver(member, of('incarnation-1', 7))
    await deliver(member, of('incarnation-2', 1))
    await deliver(member, of('incarnation-2', 2))
    const late = await sendReport(member, of('incarnation-1', 8))
    expect(await late.json()).toMatchObject({ repeated: true })
    // As of a process that judged it before it knew of the present incarnation.
    const row = { agentId: member.agentId, overlayId: seeded.overlay.id, relayed: false }
    await storeStates(seeded.em(), [{ ...row, report: of('incarnation-1', 9) }])
    expect(await stateOf(member)).toMatchObject({ incarnation: 'incarnation-2', reportNumber: 2 })
    await deliver(member, of('incarnation-3', 1))
    expect(await stateOf(member)).toMatchObject({
      incarnation: 'incarnation-3',
      formerIncarnations: ['incarnation-2', 'incarnation-1'],
    })
  })

  it('of a thousand named links is stored whole', async () => {
    const member = await join()
    const links = Array.from({ length: 1_000 }, (_, index) => ({
      peer: crypto.randomUUID(),
      weight: 1 - index / 3_000,
      share: index / 7_000,
    }))
    const one = someReport(1)
    expect((await sendReport(member, { ...one, node: { ...one.node, links } })).status).toBe(200)
    expect((await stateOf(member))?.node.links).toEqual(links)
  })

  it('one of many sent at once: each is stored under its own agent, the newest last', async () => {
    const code = await seedCode(seeded.team.database, seeded.overlay.id, { uses: 6 })
    const members = await Promise.all(
      Array.from({ length: 6 }, (_, index) => joinAgent(code, `eel-0${index}`)),
    )
    await Promise.all(
      [3, 1, 2].flatMap((number) => members.map((member) => sendReport(member, someReport(number)))),
    )
    const numbers = await Promise.all(members.map(async (member) => (await stateOf(member))?.reportNumber))
    expect(numbers).toEqual(members.map(() => 3))
  })

  it('that fails does not cost the others of its batch anything', async () => {
    const code = await seedCode(seeded.team.database, seeded.overlay.id, { uses: 2 })
    const [good, bad] = [await joinAgent(code, 'eel-01'), await joinAgent(code, 'eel-02')]
    await deliver(bad, someReport(5))
    const falling = someReport(6, (counters) => ({ ...counters, births: 1 }))
    const [one, two, three] = await Promise.all([
      sendReport(good, someReport(1)),
      sendReport(bad, falling),
      sendReport({ token: 'forged' }, someReport(1)),
    ])
    expect([one.status, two.status, three.status]).toEqual([200, 422, 401])
    expect((await stateOf(good))?.reportNumber).toBe(1)
    expect((await stateOf(bad))?.reportNumber).toBe(5)
  })

  it('does not name links where the overlay is sealed', async () => {
    const { database, teamId } = seeded.team
    const sealed = await seedOverlay(database, teamId, { slug: 'sealed', disclosure: 'sealed' })
    const member = await joinAgent(await seedCode(database, sealed.id), 'tar-01')
    const open = someReport(1)
    await deliver(member, {
      ...open,
      node: { ...open.node, links: [{ peer: member.agentId, weight: 1, share: 0.2 }] },
    })
    expect((await stateOf(member))?.node.links).toEqual([])
  })

  it('is answered with a new pass once less than half of the present one is left', async () => {
    const member = await join()
    const ingest = new Ingest(
      { forkEm: async () => seeded.em(), clock: systemClock },
      { passLifeMs: 1_000_000 },
    )
    await sql(
      seeded.em(),
      `update agent_sessions set pass_expires_at = clock_timestamp() + interval '400 seconds'`,
    )
    const first = await ingest.submit(member.token, someReport(1)).answer
    const passes = await seeded.em().find(AgentSchema, member.agentId, { populate: ['overlay'] })
    const checked = await verifyPass(
      first.pass!.pass,
      passes[0]!.overlay.publicKey,
      seeded.overlay.id,
      new Date(),
    )
    expect(checked).toMatchObject({
      ok: true,
      claims: { agentId: member.agentId, key: member.keys.publicKey },
    })
    expect((await ingest.submit(member.token, someReport(2)).answer).pass).toBeUndefined()
  })

  const good = someReport(6)
  const refused: [string, (member: Member) => Promise<Response>, number, string][] = [
    ['malformed JSON', (member) => sendReport(member, '{"number": 6,'), 400, 'malformed-json'],
    [
      'a body over a mebibyte',
      (member) => sendReport(member, JSON.stringify({ ...good, more: 'x'.repeat(MAX_REPORT_BYTES) })),
      413,
      'too-large',
    ],
    [
      'a number that is not finite',
      (member) =>
        sendReport(member, JSON.stringify(good).replace('"weightedDegree":2', '"weightedDegree":1e999')),
      400,
      'invalid-input',
    ],
    [
      'a counter that is no integer',
      (member) => sendReport(member, JSON.stringify(good).replace('"kills":60', '"kills":60.5')),
      400,
      'invalid-input',
    ],
    [
      'text that the database cannot hold',
      (member) => sendReport(member, { ...good, node: { ...good.node, version: '\0' } }),
      400,
      'invalid-input',
    ],
    [
      'counters that have fallen',
      (member) =>
        sendReport(
          member,
          someReport(6, (counters) => ({ ...counters, births: 3 })),
        ),
      422,
      'falling-counters',
    ],
    ['no token', () => call(report, good), 401, 'bad-token'],
    ['a forged token', () => sendReport({ token: 'A'.repeat(43) }, good), 401, 'bad-token'],
    [
      'a session that has ended',
      async (member) => {
        await sql(
          seeded.em(),
          `update agent_sessions set expires_at = clock_timestamp() where agent_id = ?`,
          [member.agentId],
        )
        return sendReport(member, good)
      },
      401,
      'session-expired',
    ],
    [
      'the session of an agent that has been revoked',
      async (member) => {
        await seeded.em().nativeUpdate(AgentSchema, { id: member.agentId }, { state: 'revoked' })
        return sendReport(member, good)
      },
      403,
      'agent-ended',
    ],
  ]
  it.each(refused)('with %s is refused, and what was held stays', async (_, send, status, code) => {
    const member = await join()
    await deliver(member, someReport(5))
    expect(await problemOf(await send(member))).toEqual([status, code])
    expect((await stateOf(member))?.reportNumber).toBe(5)
    expect(seeded.team.failures).toEqual([])
  })

  it('with a very large number is stored as well', async () => {
    const member = await join()
    await deliver(member, someReport(1))
    const far = { ...someReport(1), number: Number.MAX_SAFE_INTEGER, incarnation: 'incarnation-9' }
    expect((await sendReport(member, far)).status).toBe(200)
    expect((await stateOf(member))?.reportNumber).toBe(Number.MAX_SAFE_INTEGER)
  })
})
