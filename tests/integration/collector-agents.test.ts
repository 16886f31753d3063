import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { POST as enrol } from '@/app/api/agent/enrol/route'
import { POST as report } from '@/app/api/agent/report/route'
import { POST as session } from '@/app/api/agent/session/route'
import {
  AgentSchema,
  AgentSessionSchema,
  AgentStateSchema,
  AuditEntrySchema,
  ControlSchema,
  JoiningCodeSchema,
} from '@/entities'
import { Ingest } from '@/lib/collector/ingest'
import { storeStates } from '@/lib/collector/ingest-store'
import { systemClock } from '@/lib/collector/process'
import { sql } from '@/lib/db'
import { setRuntime } from '@/lib/http/runtime'
import {
  enrolReplySchema,
  generateKeys,
  MAX_REPORT_BYTES,
  sessionReplySchema,
  verifyPass,
} from '@/lib/protocol'
import {
  call,
  deliver,
  enrolBody,
  joinAgent,
  type Member,
  seedCode,
  seedOverlay,
  sendReport,
  sessionBody,
} from '@/tests/support/collector'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { someOrders } from '@/tests/support/frames'
import { seedTeam, testRuntime } from '@/tests/support/people'
import { someReport } from '@/tests/support/reports'

let database: TestDatabase
let runtime: ReturnType<typeof testRuntime>
let teamId: string
let overlay: { id: string; slug: string }
let count = 0
let startedAt = new Date()
const HOUR_MS = 3_600_000

beforeAll(async () => {
  database = await createTestDatabase()
  runtime = testRuntime(database, () => new Date())
  setRuntime(runtime)
  teamId = (await seedTeam(database.orm.em.fork(), 'harbourline', ['owner'], new Date())).teamId
})
afterAll(async () => {
  setRuntime(undefined)
  await database.close()
})
beforeEach(async () => {
  overlay = await seedOverlay(database, teamId, { slug: `tides-${count++}` })
  runtime.failures.length = 0
  startedAt = new Date()
})

const em = () => database.orm.em.fork()
const agentsOf = () => em().find(AgentSchema, { overlay: overlay.id })
const enrolmentsEntered = () =>
  em().count(AuditEntrySchema, { action: 'agent.enrol', at: { $gte: startedAt } })
const stateOf = (member: Member) => em().findOne(AgentStateSchema, member.agentId)
const usesOf = async (code: string) => {
  const codes = await em().find(JoiningCodeSchema, { overlay: overlay.id, hint: code.slice(0, 5) })
  return codes[0]?.used
}
const problemOf = async (response: Response) => {
  const body: { code?: string } = await response.json()
  return { status: response.status, code: body.code, body }
}
const join = async (name = 'tar-01') => joinAgent(await seedCode(database, overlay.id), name)

describe('enrolling', () => {
  it('joins an agent, says what it needs, and gives it a pass that its neighbours can check', async () => {
    const code = await seedCode(database, overlay.id)
    const keys = generateKeys()
    const right = await call(
      enrol,
      enrolBody(code.toLowerCase(), 'tar-01', keys, { labels: { harbour: 'Tarnwick' } }),
    )
    expect(right.status).toBe(201)
    const reply = enrolReplySchema.parse(await right.json())
    expect(reply).toMatchObject({ overlay, pace: 'drill', weights: 'unit', disclosure: 'named' })
    const pass = await verifyPass(reply.pass, reply.overlayKey, overlay.id, new Date())
    expect(pass).toMatchObject({
      ok: true,
      claims: { agentId: reply.agentId, name: 'tar-01', key: keys.publicKey },
    })
    expect(await agentsOf()).toMatchObject([
      { id: reply.agentId, labels: { harbour: 'Tarnwick' }, state: 'joined' },
    ])
  })

  it('again with the same key and name gives the same answer and takes no use, even of a code that is used up', async () => {
    const code = await seedCode(database, overlay.id)
    const keys = generateKeys()
    const first = enrolReplySchema.parse(await (await call(enrol, enrolBody(code, 'tar-01', keys))).json())
    const again = await call(enrol, enrolBody(code, 'tar-01', keys, { address: 'ws://127.0.0.1:4001/' }))
    expect(again.status).toBe(200)
    expect(enrolReplySchema.parse(await again.json()).agentId).toBe(first.agentId)
    expect(await usesOf(code)).toBe(1)
    expect(await agentsOf()).toMatchObject([{ address: 'ws://127.0.0.1:4001/' }])
    expect(await enrolmentsEntered()).toBe(1)
  })

  it('by many at once takes no more uses than a code has, and refuses the others', async () => {
    const code = await seedCode(database, overlay.id, { uses: 3 })
    const responses = await Promise.all(
      Array.from({ length: 8 }, (_, index) => call(enrol, enrolBody(code, `tar-0${index}`, generateKeys()))),
    )
    expect(responses.map(({ status }) => status).sort()).toEqual([201, 201, 201, 403, 403, 403, 403, 403])
    expect(await usesOf(code)).toBe(3)
    expect(await agentsOf()).toHaveLength(3)
  })

  it('of one agent twice at once joins it once and takes one use', async () => {
    const code = await seedCode(database, overlay.id, { uses: 5 })
    const keys = generateKeys()
    const responses = await Promise.all([1, 2, 3].map(() => call(enrol, enrolBody(code, 'tar-01', keys))))
    const ids = await Promise.all(
      responses.map(async (response) => enrolReplySchema.parse(await response.json()).agentId),
    )
    expect(new Set(ids).size).toBe(1)
    expect(await usesOf(code)).toBe(1)
  })

  it('under a name that another holds is refused with the remedy and gives the use back', async () => {
    const code = await seedCode(database, overlay.id, { uses: 2 })
    await call(enrol, enrolBody(code, 'tar-01', generateKeys()))
    const {
      status,
      code: problem,
      body,
    } = await problemOf(await call(enrol, enrolBody(code, 'tar-01', generateKeys())))
    expect([status, problem]).toEqual([409, 'name-taken'])
    expect(body).toMatchObject({ detail: expect.stringContaining('Enrol under another name') })
    expect(await usesOf(code)).toBe(1)
  })

  const past = new Date(Date.now() - HOUR_MS)
  const keys = generateKeys()
  const refused: [string, () => Promise<unknown>, number, string, object?][] = [
    ['malformed JSON', async () => '{"code": ', 400, 'malformed-json'],
    ['a body over 64 kB', async () => JSON.stringify({ code: 'x'.repeat(70_000) }), 413, 'too-large'],
    [
      'an unknown code',
      async () => enrolBody('0000-0000', 'tar-01', keys),
      403,
      'code-refused',
      { reason: 'unknown' },
    ],
    [
      'an expired code',
      async () => enrolBody(await seedCode(database, overlay.id, { expiresAt: past }), 'tar-01', keys),
      403,
      'code-refused',
      { reason: 'expired' },
    ],
    [
      'a revoked code',
      async () => enrolBody(await seedCode(database, overlay.id, { revokedAt: past }), 'tar-01', keys),
      403,
      'code-refused',
      { reason: 'revoked' },
    ],
    [
      'a used code',
      async () => {
        const code = await seedCode(database, overlay.id)
        await sql(em(), 'update joining_codes set used = uses where overlay_id = ?', [overlay.id])
        return enrolBody(code, 'tar-01', keys)
      },
      403,
      'code-refused',
      { reason: 'used' },
    ],
    [
      'a signature by another key',
      async () => ({ ...enrolBody('0000', 'tar-01', keys), publicKey: generateKeys().publicKey }),
      401,
      'bad-signature',
    ],
    ['a name with a line break', async () => enrolBody('0000', 'tar\n01', keys), 400, 'invalid-input'],
    [
      'a label that the database cannot hold',
      async () => enrolBody('0000', 'tar-01', keys, { labels: { harbour: 'a\0b' } }),
      400,
      'invalid-input',
    ],
  ]
  it.each(refused)('with %s is refused and leaves nothing', async (_, body, status, code, members = {}) => {
    const problem = await problemOf(await call(enrol, await body()))
    expect([problem.status, problem.code]).toEqual([status, code])
    expect(problem.body).toMatchObject({ ...members, retry: false })
    expect(await agentsOf()).toEqual([])
    expect(await enrolmentsEntered()).toBe(0)
    expect(runtime.failures).toEqual([])
  })
})

describe('opening a session', () => {
  it('gives a token for an hour, of which only a hash is kept', async () => {
    const member = await join()
    const reply = sessionReplySchema.parse(
      await (await call(session, sessionBody(member.agentId, member.keys))).json(),
    )
    expect(Date.parse(reply.expiresAt) - Date.parse(reply.serverTime)).toBe(HOUR_MS)
    expect(Buffer.from(reply.token, 'base64url')).toHaveLength(32)
    const stored = await em().find(AgentSessionSchema, { agent: member.agentId })
    expect(stored).toHaveLength(2)
    expect(JSON.stringify(stored)).not.toContain(reply.token)
  })

  it('with a clock that is off says the server’s time; at most five minutes are allowed', async () => {
    const member = await join()
    const at = (ms: number) => sessionBody(member.agentId, member.keys, new Date(Date.now() + ms))
    for (const ms of [-310_000, 310_000]) {
      const { status, code, body } = await problemOf(await call(session, at(ms)))
      expect([status, code]).toEqual([401, 'clock-skew'])
      const { serverTime } = body as { serverTime?: string }
      expect(Math.abs(Date.parse(serverTime!) - Date.now())).toBeLessThan(60_000)
    }
    expect((await call(session, at(-290_000))).status).toBe(200)
  })

  const refused: [string, (member: Member) => Promise<unknown>, number, string][] = [
    ['malformed JSON', async () => 'no', 400, 'malformed-json'],
    ['an id that is none', async ({ keys }) => sessionBody('agent-1', keys), 401, 'unknown-agent'],
    ['an unknown agent', async ({ keys }) => sessionBody(crypto.randomUUID(), keys), 401, 'unknown-agent'],
    [
      'a signature by another key',
      async ({ agentId }) => sessionBody(agentId, generateKeys()),
      401,
      'bad-signature',
    ],
    [
      'a nonce that was not signed',
      async ({ agentId, keys }) => ({ ...sessionBody(agentId, keys), nonce: 'A'.repeat(22) }),
      401,
      'bad-signature',
    ],
    [
      'a proof that was used already',
      async ({ agentId, keys }) => {
        const body = sessionBody(agentId, keys)
        await call(session, body)
        return body
      },
      401,
      'proof-used',
    ],
    [
      'the key of a revoked agent',
      async ({ agentId, keys }) => {
        await em().nativeUpdate(AgentSchema, { id: agentId }, { state: 'revoked' })
        return sessionBody(agentId, keys)
      },
      403,
      'agent-ended',
    ],
  ]
  it.each(refused)('with %s is refused', async (_, body, status, code) => {
    const member = await join()
    const sent = await body(member)
    const before = await em().count(AgentSessionSchema, {})
    const problem = await problemOf(await call(session, sent))
    expect([problem.status, problem.code]).toEqual([status, code])
    expect(await em().count(AgentSessionSchema, {})).toBe(before)
    expect(runtime.failures).toEqual([])
  })
})

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
    await em().insert(ControlSchema, {
      overlayId: overlay.id,
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
    const row = { agentId: member.agentId, overlayId: overlay.id, relayed: false }
    await storeStates(em(), [{ ...row, report: of('incarnation-1', 9) }])
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
    const code = await seedCode(database, overlay.id, { uses: 6 })
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
    const code = await seedCode(database, overlay.id, { uses: 2 })
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
    overlay = await seedOverlay(database, teamId, { slug: `tides-${count++}`, disclosure: 'sealed' })
    const member = await join()
    const open = someReport(1)
    await deliver(member, {
      ...open,
      node: { ...open.node, links: [{ peer: member.agentId, weight: 1, share: 0.2 }] },
    })
    expect((await stateOf(member))?.node.links).toEqual([])
  })

  it('is answered with a new pass once less than half of the present one is left', async () => {
    const member = await join()
    const ingest = new Ingest({ forkEm: async () => em(), clock: systemClock }, { passLifeMs: 1_000_000 })
    await sql(em(), `update agent_sessions set pass_expires_at = clock_timestamp() + interval '400 seconds'`)
    const first = await ingest.submit(member.token, someReport(1)).answer
    const passes = await em().find(AgentSchema, member.agentId, { populate: ['overlay'] })
    const checked = await verifyPass(first.pass!.pass, passes[0]!.overlay.publicKey, overlay.id, new Date())
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
        await sql(em(), `update agent_sessions set expires_at = clock_timestamp() where agent_id = ?`, [
          member.agentId,
        ])
        return sendReport(member, good)
      },
      401,
      'session-expired',
    ],
    [
      'the session of an agent that has been revoked',
      async (member) => {
        await em().nativeUpdate(AgentSchema, { id: member.agentId }, { state: 'revoked' })
        return sendReport(member, good)
      },
      403,
      'agent-ended',
    ],
  ]
  it.each(refused)('with %s is refused, and what was held stays', async (_, send, status, code) => {
    const member = await join()
    await deliver(member, someReport(5))
    const problem = await problemOf(await send(member))
    expect([problem.status, problem.code]).toEqual([status, code])
    expect((await stateOf(member))?.reportNumber).toBe(5)
    expect(runtime.failures).toEqual([])
  })

  it('with a very large number is stored as well', async () => {
    const member = await join()
    await deliver(member, someReport(1))
    const far = { ...someReport(1), number: Number.MAX_SAFE_INTEGER, incarnation: 'incarnation-9' }
    expect((await sendReport(member, far)).status).toBe(200)
    expect((await stateOf(member))?.reportNumber).toBe(Number.MAX_SAFE_INTEGER)
  })
})
