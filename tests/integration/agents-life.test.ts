import { randomBytes } from 'node:crypto'
import { describe, expect, it } from 'vitest'
import { GET as directoryRoute } from '@/app/api/agent/directory/route'
import { POST as enrolRoute } from '@/app/api/agent/enrol/route'
import { POST as keyRoute } from '@/app/api/agent/key/route'
import { POST as leaveRoute } from '@/app/api/agent/leave/route'
import { POST as sessionRoute } from '@/app/api/agent/session/route'
import { AgentSchema, AgentSessionSchema, AuditEntrySchema, OverlayEventSchema } from '@/entities'
import { LeaderStore } from '@/lib/collector/leader-store'
import { sql } from '@/lib/db'
import {
  directorySchema,
  enrolReplySchema,
  generateKeys,
  type KeyPair,
  keyChangeReplySchema,
  keyChangeText,
  leaveReplySchema,
  sessionReplySchema,
  signText,
  verifyPass,
} from '@/lib/protocol'
import {
  ask,
  call,
  deliver,
  enrolBody,
  joinAgent,
  type Member,
  problemOf,
  seedCode,
  sendReport,
  sessionBody,
} from '@/tests/support/collector'
import { overlayPerTest } from '@/tests/support/overlay-per-test'
import { someReport } from '@/tests/support/reports'

const seeded = overlayPerTest()

const code = (uses = 5) => seedCode(seeded.team.database, seeded.overlay.id, { uses })
const join = async (name = 'tar-01', over: object = {}) => joinAgent(await code(), name, {}, over)
const agentOf = ({ agentId }: Member) => seeded.em().findOneOrFail(AgentSchema, agentId)
const eventsOf = async () =>
  (
    await seeded.em().find(OverlayEventSchema, { overlayId: seeded.overlay.id }, { orderBy: { id: 'asc' } })
  ).map(({ kind, text }) => `${kind}: ${text}`)
const shutNow = async () => {
  const store = new LeaderStore(
    { forkEm: async () => seeded.em() },
    { overlayId: seeded.overlay.id, holder: 'test' },
  )
  return (await store.load())?.shut
}
const of = (incarnation: string, number: number) => ({ ...someReport(number), incarnation })

describe('an agent that leaves', () => {
  const leave = (member: Member, body: unknown = { reason: 'the berth is closed' }) =>
    call(leaveRoute, body, { authorization: `Bearer ${member.token}` })

  it('is not of the overlay any more: its sessions end, its links are shut, it is entered and said', async () => {
    const member = await join()
    expect(await shutNow()).toEqual([])
    const response = await leave(member)
    expect(response.status).toBe(200)
    leaveReplySchema.parse(await response.json())
    expect(await agentOf(member)).toMatchObject({ state: 'left', endedAt: expect.any(Date) })
    expect(await seeded.em().count(AgentSessionSchema, { agent: member.agentId })).toBe(0)
    expect(await shutNow()).toEqual([{ agentId: member.agentId, reason: 'left' }])
    expect(await eventsOf()).toContain('agent-left: tar-01 left: the berth is closed')
    const entry = await seeded.em().findOne(AuditEntrySchema, {
      action: 'agent.leave',
      subject: `${seeded.overlay.slug}: tar-01`,
    })
    expect(entry).toMatchObject({ outcome: 'ok', data: { reason: 'the berth is closed' } })
    expect(await problemOf(await sendReport(member, someReport(1)))).toEqual([401, 'bad-token'])
    expect(await problemOf(await call(sessionRoute, sessionBody(member.agentId, member.keys)))).toEqual([
      403,
      'agent-ended',
    ])
    expect(await problemOf(await leave(member))).toEqual([401, 'bad-token'])
  })

  it('gives its name free, though not its key; links to the one before stay shut while its pass lasts', async () => {
    const member = await join()
    await leave(member, {})
    for (const name of ['tar-01', 'tar-02'])
      expect(await problemOf(await call(enrolRoute, enrolBody(await code(), name, member.keys)))).toEqual([
        403,
        'agent-ended',
      ])
    const response = await call(enrolRoute, enrolBody(await code(), 'tar-01', generateKeys()))
    expect(response.status).toBe(201)
    const next = enrolReplySchema.parse(await response.json())
    expect(next.agentId).not.toBe(member.agentId)
    expect(await seeded.em().find(AgentSchema, { overlay: seeded.overlay.id })).toMatchObject([
      { id: next.agentId, name: 'tar-01', state: 'joined' },
    ])
    expect(await shutNow()).toEqual([{ agentId: member.agentId, reason: 'left' }])
    await sql(seeded.em(), `update shut_agents set until = clock_timestamp() - interval '3 minutes'`)
    expect(await shutNow()).toEqual([])
  })

  it.each([
    ['no token', {}, 401, 'bad-token', () => ({})],
    ['a reason of 201 characters', { reason: 'x'.repeat(201) }, 400, 'invalid-input', bearer],
    ['malformed JSON', '{"reason"', 400, 'malformed-json', bearer],
    ['a NUL in the reason', { reason: '\0' }, 400, 'invalid-input', bearer],
  ] as const)('with %s is refused and stays', async (_, body, status, problem, headers) => {
    const member = await join()
    expect(await problemOf(await call(leaveRoute, body, headers(member)))).toEqual([status, problem])
    expect((await agentOf(member)).state).toBe('joined')
  })
})

function bearer({ token }: Member): Record<string, string> {
  return { authorization: `Bearer ${token}` }
}

describe('an agent that changes its key', () => {
  const change = (agentId: string, from: KeyPair, to: KeyPair, at = new Date()) => {
    const nonce = randomBytes(16).toString('base64url')
    const request = { agentId, publicKey: to.publicKey, at: at.toISOString(), nonce }
    const text = keyChangeText(request)
    return {
      ...request,
      signature: signText(from.privateKey, text),
      newSignature: signText(to.privateKey, text),
    }
  }

  it('has a pass for the new one, and the old one and its sessions are worth nothing', async () => {
    const member = await join()
    const next = generateKeys()
    const body = change(member.agentId, member.keys, next)
    const response = await call(keyRoute, body)
    expect(response.status).toBe(200)
    const { pass } = keyChangeReplySchema.parse(await response.json())
    const { overlay: known } = await seeded.em().findOneOrFail(AgentSchema, member.agentId, {
      populate: ['overlay'],
    })
    expect(await verifyPass(pass, known.publicKey, seeded.overlay.id, new Date())).toMatchObject({
      ok: true,
      claims: { agentId: member.agentId, key: next.publicKey },
    })
    expect(await problemOf(await sendReport(member, someReport(1)))).toEqual([401, 'bad-token'])
    expect(await problemOf(await call(sessionRoute, sessionBody(member.agentId, member.keys)))).toEqual([
      401,
      'bad-signature',
    ])
    expect((await call(sessionRoute, sessionBody(member.agentId, next))).status).toBe(200)
    // The first answer may have been lost: the same words again are answered as well, and entered once.
    expect((await call(keyRoute, body)).status).toBe(200)
    const where = { action: 'agent.key', subject: `${seeded.overlay.slug}: tar-01` }
    expect(await seeded.em().count(AuditEntrySchema, where)).toBe(1)
  })

  it('cannot be sent back to an old key by repeating old words', async () => {
    const member = await join()
    const next = generateKeys()
    const first = change(member.agentId, member.keys, next, new Date(Date.now() - 2_000))
    await call(keyRoute, first)
    const back = change(member.agentId, next, member.keys, new Date(Date.now() - 1_000))
    expect((await call(keyRoute, back)).status).toBe(200)
    expect(await problemOf(await call(keyRoute, first))).toEqual([401, 'proof-used'])
    expect((await agentOf(member)).publicKey).toBe(member.keys.publicKey)
  })

  const refused: [string, (member: Member) => Promise<object> | object, number, string][] = [
    [
      'another key than its own',
      ({ agentId }) => change(agentId, generateKeys(), generateKeys()),
      401,
      'bad-signature',
    ],
    [
      'a new key that did not sign',
      ({ agentId, keys }) => ({
        ...change(agentId, keys, generateKeys()),
        newSignature: 'A'.repeat(86),
      }),
      401,
      'bad-signature',
    ],
    [
      'words of an hour ago',
      ({ agentId, keys }) => change(agentId, keys, generateKeys(), new Date(Date.now() - 3_600_000)),
      401,
      'clock-skew',
    ],
    ['an unknown id', ({ keys }) => change(crypto.randomUUID(), keys, generateKeys()), 401, 'unknown-agent'],
    [
      'the key of another agent',
      async ({ agentId, keys }) => change(agentId, keys, (await join('gul-04')).keys),
      409,
      'cloned-key',
    ],
    [
      'a nonce that is none',
      ({ agentId, keys }) => ({ ...change(agentId, keys, generateKeys()), nonce: '!' }),
      400,
      'invalid-input',
    ],
  ]
  it.each(refused)('with %s is refused', async (_, body, status, problem) => {
    const member = await join()
    expect(await problemOf(await call(keyRoute, await body(member)))).toEqual([status, problem])
    expect((await agentOf(member)).publicKey).toBe(member.keys.publicKey)
  })
})

describe('the directory', () => {
  const read = (token: string, headers: object = {}) => ask(directoryRoute, 'GET', { bearer: token, headers })

  it('lists every agent joined, and says when nothing has changed', async () => {
    const tar = await join('tar-01', { node: '10.1.0.1', address: 'ws://10.1.0.1:4000/' })
    const gul = await join('gul-04')
    const response = await read(tar.token)
    const list = directorySchema.parse(await response.json())
    expect(list.items).toEqual([
      { agentId: gul.agentId, name: 'gul-04', address: null, node: null },
      { agentId: tar.agentId, name: 'tar-01', address: 'ws://10.1.0.1:4000/', node: '10.1.0.1' },
    ])
    const etag = response.headers.get('etag')!
    const again = await read(gul.token, { 'if-none-match': `"old", W/${etag}` })
    expect([again.status, await again.text(), again.headers.get('etag')]).toEqual([304, '', etag])
    const moved = { node: '10.1.0.9', address: null, version: '0.2.0' }
    await call(sessionRoute, sessionBody(tar.agentId, tar.keys, new Date(), moved))
    const changed = await read(gul.token, { 'if-none-match': etag })
    expect(changed.status).toBe(200)
    expect(directorySchema.parse(await changed.json()).items[1]).toMatchObject({
      node: '10.1.0.9',
      address: null,
    })
    expect((await agentOf(tar)).version).toBe('0.2.0')
    await sql(seeded.em(), `update agents set state = 'revoked' where id = ?`, [gul.agentId])
    expect(directorySchema.parse(await (await read(tar.token)).json()).items).toHaveLength(1)
    expect(await problemOf(await read(gul.token))).toEqual([403, 'agent-ended'])
  })

  it('is refused to strangers', async () => {
    expect(await problemOf(await read('nobody'))).toEqual([401, 'bad-token'])
    expect(await problemOf(await ask(directoryRoute, 'GET'))).toEqual([401, 'bad-token'])
  })
})

describe('a copied key', () => {
  it('under another name is refused with the remedy', async () => {
    const member = await join()
    const response = await call(enrolRoute, enrolBody(await code(), 'tar-02', member.keys))
    expect(await problemOf(response)).toEqual([409, 'cloned-key'])
    expect(await response.json()).toMatchObject({
      detail: expect.stringContaining(
        'delete the configuration file with the key, and enrol it with a joining code',
      ),
      retry: false,
    })
  })

  it('from another machine is refused while the first is heard, and let in when it has moved', async () => {
    // At this pace it is heard for a minute after a report.
    await sql(seeded.em(), `update overlays set pace = 'calm' where id = ?`, [seeded.overlay.id])
    const member = await join('tar-01', { host: 'machine-a' })
    await deliver(member, someReport(1))
    const elsewhere = () => sessionBody(member.agentId, member.keys, new Date(), { host: 'machine-b' })
    expect(await problemOf(await call(sessionRoute, elsewhere()))).toEqual([409, 'cloned-key'])
    expect(await problemOf(await call(sessionRoute, elsewhere()))).toEqual([409, 'cloned-key'])
    const again = enrolBody(await code(), 'tar-01', member.keys, { host: 'machine-b' })
    expect(await problemOf(await call(enrolRoute, again))).toEqual([409, 'cloned-key'])
    expect((await eventsOf()).filter((text) => text.startsWith('agent-cloned'))).toEqual([
      'agent-cloned: Two programs use the key of tar-01',
    ])
    const here = sessionBody(member.agentId, member.keys, new Date(), { host: 'machine-a' })
    expect((await call(sessionRoute, here)).status).toBe(200)
    await sql(
      seeded.em(),
      `update agent_states set received_at = clock_timestamp() - interval '2 minutes' where agent_id = ?`,
      [member.agentId],
    )
    expect((await call(sessionRoute, elsewhere())).status).toBe(200)
    expect((await agentOf(member)).host).toBe('machine-b')
  })

  it('on the same machine is noticed by reports of two starts in turn; the later one goes on', async () => {
    const member = await join()
    const statuses: (string | undefined)[] = []
    await deliver(member, of('the-start-1', 1))
    for (let number = 1; number <= 7; number++) {
      expect((await sendReport(member, of('the-start-2', number))).status).toBe(200)
      statuses.push((await problemOf(await sendReport(member, of('the-start-1', number + 1))))[1])
    }
    expect(statuses).toEqual([...Array(4).fill(undefined), ...Array(3).fill('cloned-key')])
    expect((await eventsOf()).filter((text) => text.startsWith('agent-cloned'))).toHaveLength(1)
  })

  it('on eight machines at once is noticed as well', async () => {
    const member = await join()
    const codes = new Set<string | undefined>()
    for (let number = 1; number <= 3; number++)
      for (let start = 0; start < 8; start++)
        codes.add((await problemOf(await sendReport(member, of(`start-of-${start}`, number))))[1])
    expect(codes).toContain('cloned-key')
  })

  it('is not seen in honest restarts, however many, nor in stragglers and their retries', async () => {
    const member = await join()
    for (let start = 0; start < 12; start++) {
      for (let number = 1; number <= 3; number++)
        expect((await sendReport(member, of(`start-${start}-`, number))).status).toBe(200)
      // What was on its way when the program ended, and again.
      if (start > 0)
        for (const number of [30, 30, 30, 30, 30, 30])
          expect((await sendReport(member, of(`start-${start - 1}-`, number))).status).toBe(200)
    }
    expect((await eventsOf()).filter((text) => text.startsWith('agent-cloned'))).toEqual([])
  })
})

it('a session says what the agent needs since version 2', async () => {
  const member = await join()
  const response = await call(sessionRoute, sessionBody(member.agentId, member.keys))
  expect(sessionReplySchema.parse(await response.json())).toMatchObject({ keyRings: [], weights: 'unit' })
  expect(seeded.team.failures).toEqual([])
})
