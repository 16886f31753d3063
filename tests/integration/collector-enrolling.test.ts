import { beforeEach, describe, expect, it } from 'vitest'
import { POST as enrol } from '@/app/api/agent/enrol/route'
import { AgentSchema, AuditEntrySchema, JoiningCodeSchema } from '@/entities'
import { sql } from '@/lib/db'
import { enrolReplySchema, generateKeys, verifyPass } from '@/lib/protocol'
import { call, enrolBody, seedCode } from '@/tests/support/collector'
import { overlayPerTest } from '@/tests/support/overlay-per-test'

const seeded = overlayPerTest()

const HOUR_MS = 3_600_000
let enteredBefore = 0

beforeEach(async () => {
  seeded.team.failures.length = 0
  enteredBefore = await enrolmentsInAll()
})

const agentsOf = () => seeded.em().find(AgentSchema, { overlay: seeded.overlay.id })
const enrolmentsInAll = () => seeded.em().count(AuditEntrySchema, { action: 'agent.enrol' })
const enrolmentsEntered = async () => (await enrolmentsInAll()) - enteredBefore
const usesOf = async (code: string) => {
  const codes = await seeded
    .em()
    .find(JoiningCodeSchema, { overlay: seeded.overlay.id, hint: code.slice(0, 5) })
  return codes[0]?.used
}
const problemOf = async (response: Response) => {
  const body: { code?: string } = await response.json()
  return { status: response.status, code: body.code, body }
}

describe('enrolling', () => {
  it('joins an agent, says what it needs, and gives it a pass that its neighbours can check', async () => {
    const code = await seedCode(seeded.team.database, seeded.overlay.id)
    const keys = generateKeys()
    const right = await call(
      enrol,
      enrolBody(code.toLowerCase(), 'tar-01', keys, { labels: { harbour: 'Tarnwick' } }),
    )
    expect(right.status).toBe(201)
    const reply = enrolReplySchema.parse(await right.json())
    expect(reply).toMatchObject({
      overlay: seeded.overlay,
      pace: 'drill',
      weights: 'unit',
      disclosure: 'named',
    })
    const pass = await verifyPass(reply.pass, reply.overlayKey, seeded.overlay.id, new Date())
    expect(pass).toMatchObject({
      ok: true,
      claims: { agentId: reply.agentId, name: 'tar-01', key: keys.publicKey },
    })
    expect(await agentsOf()).toMatchObject([
      { id: reply.agentId, labels: { harbour: 'Tarnwick' }, state: 'joined' },
    ])
  })

  it('again with the same key and name gives the same answer and takes no use, even of a code that is used up', async () => {
    const code = await seedCode(seeded.team.database, seeded.overlay.id)
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
    const code = await seedCode(seeded.team.database, seeded.overlay.id, { uses: 3 })
    const responses = await Promise.all(
      Array.from({ length: 8 }, (_, index) => call(enrol, enrolBody(code, `tar-0${index}`, generateKeys()))),
    )
    expect(responses.map(({ status }) => status).sort()).toEqual([201, 201, 201, 403, 403, 403, 403, 403])
    expect(await usesOf(code)).toBe(3)
    expect(await agentsOf()).toHaveLength(3)
  })

  it('of one agent twice at once joins it once and takes one use', async () => {
    const code = await seedCode(seeded.team.database, seeded.overlay.id, { uses: 5 })
    const keys = generateKeys()
    const responses = await Promise.all([1, 2, 3].map(() => call(enrol, enrolBody(code, 'tar-01', keys))))
    const ids = await Promise.all(
      responses.map(async (response) => enrolReplySchema.parse(await response.json()).agentId),
    )
    expect(new Set(ids).size).toBe(1)
    expect(await usesOf(code)).toBe(1)
  })

  it('under a name that another holds is refused with the remedy and gives the use back', async () => {
    const code = await seedCode(seeded.team.database, seeded.overlay.id, { uses: 2 })
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
      async () =>
        enrolBody(
          await seedCode(seeded.team.database, seeded.overlay.id, { expiresAt: past }),
          'tar-01',
          keys,
        ),
      403,
      'code-refused',
      { reason: 'expired' },
    ],
    [
      'a revoked code',
      async () =>
        enrolBody(
          await seedCode(seeded.team.database, seeded.overlay.id, { revokedAt: past }),
          'tar-01',
          keys,
        ),
      403,
      'code-refused',
      { reason: 'revoked' },
    ],
    [
      'a used code',
      async () => {
        const code = await seedCode(seeded.team.database, seeded.overlay.id)
        await sql(seeded.em(), 'update joining_codes set used = uses where overlay_id = ?', [
          seeded.overlay.id,
        ])
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
    expect(seeded.team.failures).toEqual([])
  })
})
