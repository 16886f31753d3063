import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { GET as health } from '@/app/api/health/route'
import { DELETE as revokeCode } from '@/app/api/v1/overlays/[slug]/joining-codes/[id]/route'
import { POST as createCode, GET as listCodes } from '@/app/api/v1/overlays/[slug]/joining-codes/route'
import { GET as getOverlay } from '@/app/api/v1/overlays/[slug]/route'
import { POST as createOverlay, GET as listOverlays } from '@/app/api/v1/overlays/route'
import { AuditEntrySchema, JoiningCodeSchema, OverlaySchema } from '@/entities'
import { SESSION_COOKIE } from '@/lib/auth/cookie'
import { createSession } from '@/lib/auth/session'
import { listAudit } from '@/lib/data/audit'
import { createdJoiningCodeSchema, overlaySchema, problemSchema } from '@/lib/data/dto'
import { takeJoiningCode } from '@/lib/data/joining-codes'
import { createToken } from '@/lib/data/tokens'
import { AppError, type RouteHandler, route, setRuntime } from '@/lib/http'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { callAs, callAsUser, seedTeam, type TeamSeed, testRuntime } from '@/tests/support/people'

const ORIGIN = 'http://thinspan.test'
let now = new Date('2026-12-01T10:00:00.000Z')
let database: TestDatabase
let runtime: ReturnType<typeof testRuntime>
let ours: TeamSeed
let theirs: TeamSeed
const tokens = { read: '', write: '', theirs: '' }
const cookies = { owner: '', viewer: '' }

const fork = () => database.orm.em.fork()

beforeAll(async () => {
  database = await createTestDatabase()
  runtime = testRuntime(database, () => now)
  setRuntime(runtime)
  ours = await seedTeam(fork(), 'harbourline', ['owner', 'operator', 'viewer'], now)
  theirs = await seedTeam(fork(), 'gullhythe', ['owner'], now)
  const system = () => callAs(fork(), { kind: 'system', name: 'test' }, now)
  const make = async (email: string, scope: 'read' | 'write') =>
    (await createToken(system(), { email, scope })).token
  tokens.read = await make('owner@harbourline.example', 'read')
  tokens.write = await make('operator@harbourline.example', 'write')
  tokens.theirs = await make('owner@gullhythe.example', 'write')
  cookies.owner = (await createSession(fork(), ours.members[0]!.userId, false)).value
  cookies.viewer = (await createSession(fork(), ours.members[2]!.userId, false)).value
})
afterAll(async () => {
  setRuntime(undefined)
  await database.close()
})

interface Ask {
  token?: string
  cookie?: string
  origin?: string | null
  body?: unknown
  raw?: string
  method?: string
}
async function ask(handler: RouteHandler, params: Record<string, string>, options: Ask = {}) {
  const headers = new Headers({ host: 'thinspan.test' })
  if (options.token) headers.set('authorization', `Bearer ${options.token}`)
  if (options.cookie) headers.set('cookie', `${SESSION_COOKIE}=${options.cookie}`)
  if (options.origin !== null) headers.set('origin', options.origin ?? ORIGIN)
  const body = options.raw ?? (options.body === undefined ? undefined : JSON.stringify(options.body))
  if (body !== undefined) headers.set('content-type', 'application/json')
  const method = options.method ?? (body === undefined ? 'GET' : 'POST')
  const response = await handler(new Request(`${ORIGIN}/`, { method, headers, body }), {
    params: Promise.resolve(params),
  })
  const text = await response.text()
  return { status: response.status, body: text ? JSON.parse(text) : null, headers: response.headers }
}
const overlay = (slug: string) => ({
  name: 'Tide tables',
  slug,
  pace: 'drill',
  disclosure: 'named',
  weights: 'unit',
})

describe('a token', () => {
  it('of scope write creates an overlay for its team, keys and all', async () => {
    const { status, body } = await ask(createOverlay, {}, { token: tokens.write, body: overlay('tides') })
    expect(status).toBe(201)
    expect(overlaySchema.strict().parse(body)).toMatchObject({
      slug: 'tides',
      team: { slug: 'harbourline' },
      role: 'operator',
      joined: 0,
    })
    const row = await fork().findOneOrFail(OverlaySchema, { slug: 'tides' })
    expect(Buffer.from(row.privateKey, 'base64url')).toHaveLength(32)
    expect(Buffer.from(row.publicKey, 'base64url')).toHaveLength(32)
    expect(JSON.stringify(body)).not.toContain(row.privateKey)
  })

  it('of scope read reads and cannot write', async () => {
    expect((await ask(listOverlays, {}, { token: tokens.read })).body.items).toMatchObject([
      { slug: 'tides' },
    ])
    const refused = await ask(createOverlay, {}, { token: tokens.read, body: overlay('nope') })
    expect([refused.status, problemSchema.parse(refused.body).code]).toEqual([403, 'token-refused'])
    expect(await fork().count(OverlaySchema, { slug: 'nope' })).toBe(0)
  })

  it('of another team finds nothing', async () => {
    expect((await ask(getOverlay, { slug: 'tides' }, { token: tokens.theirs })).status).toBe(404)
    expect((await ask(listOverlays, {}, { token: tokens.theirs })).body.items).toEqual([])
    expect((await ask(listCodes, { slug: 'tides' }, { token: tokens.theirs })).status).toBe(404)
    const taken = await ask(createOverlay, {}, { token: tokens.theirs, body: overlay('tides') })
    expect([taken.status, taken.body.code]).toEqual([409, 'slug-taken'])
  })

  it('that is made up is refused, and says how to get another', async () => {
    const { status, body, headers } = await ask(listOverlays, {}, { token: 'made-up', cookie: cookies.owner })
    expect([status, body.code, headers.get('content-type')]).toEqual([
      401,
      'bad-token',
      'application/problem+json',
    ])
  })
})

describe('a session', () => {
  it('reads, and writes from pages of this server only', async () => {
    expect(
      (await ask(getOverlay, { slug: 'tides' }, { cookie: cookies.viewer, origin: null })).body.role,
    ).toBe('viewer')
    const foreign = await ask(
      createOverlay,
      {},
      { cookie: cookies.owner, origin: 'http://elsewhere.example', body: overlay('x') },
    )
    expect([foreign.status, foreign.body.code]).toEqual([403, 'wrong-origin'])
    expect(
      (await ask(createOverlay, {}, { cookie: cookies.owner, origin: null, body: overlay('x') })).status,
    ).toBe(403)
    expect((await ask(createOverlay, {}, { cookie: cookies.owner, body: overlay('berths') })).status).toBe(
      201,
    )
  })

  it('of a viewer cannot create or revoke', async () => {
    const code = { body: { uses: 1, expiresInHours: 1 }, cookie: cookies.viewer }
    expect((await ask(createCode, { slug: 'tides' }, code)).body.code).toBe('forbidden')
    expect((await ask(listCodes, { slug: 'tides' }, { cookie: cookies.viewer })).body.code).toBe('forbidden')
    expect((await ask(createOverlay, {}, { cookie: cookies.viewer, body: overlay('y') })).body.code).toBe(
      'forbidden',
    )
  })

  it('is needed', async () => {
    expect((await ask(listOverlays, {})).status).toBe(401)
    expect((await ask(listOverlays, {}, { cookie: 'forged' })).status).toBe(401)
  })
})

describe('input', () => {
  it.each([
    ['malformed JSON', { raw: '{"name":' }, 400, 'malformed-json'],
    ['a slug with capitals', { body: overlay('Tides') }, 400, 'invalid-input'],
    ['a body over the limit', { raw: `"${'x'.repeat(70_000)}"` }, 413, 'too-large'],
  ])('%s is a problem', async (_name, input, status, code) => {
    const answer = await ask(createOverlay, {}, { token: tokens.write, ...input })
    expect([answer.status, answer.body.code]).toEqual([status, code])
  })

  it('of an address with a NUL in it is a problem and not a failure', async () => {
    const before = runtime.failures.length
    const read = await ask(getOverlay, { slug: 'tides\0' }, { token: tokens.read })
    expect([read.status, read.body.code]).toEqual([400, 'invalid-input'])
    const written = await ask(
      createOverlay,
      {},
      { token: tokens.write, body: { ...overlay('nul'), name: 'a\0b' } },
    )
    expect([written.status, written.body.code]).toEqual([400, 'invalid-input'])
    expect(runtime.failures.length).toBe(before)
  })

  it('is not looked at before the caller is known', async () => {
    expect((await ask(createOverlay, {}, { raw: '{"name":' })).body.code).toBe('not-signed-in')
  })
})

describe('joining codes', () => {
  const create = async (uses: number) =>
    createdJoiningCodeSchema.parse(
      (await ask(createCode, { slug: 'tides' }, { token: tokens.write, body: { uses, expiresInHours: 2 } }))
        .body,
    )

  it('are shown once and stored as hashes', async () => {
    const { code, hint } = await create(1)
    expect(code.startsWith(hint)).toBe(true)
    expect(JSON.stringify(await fork().find(JoiningCodeSchema, {}))).not.toContain(code)
    const listed = await ask(listCodes, { slug: 'tides' }, { token: tokens.read })
    expect(JSON.stringify(listed.body)).not.toContain(code)
    expect(JSON.stringify(await fork().find(AuditEntrySchema, {}))).not.toContain(code)
  })

  it('open exactly as often as they say, however many come at once', async () => {
    const { code, id } = await create(3)
    const taken = await Promise.all(
      Array.from({ length: 12 }, () => takeJoiningCode(fork(), code.toLowerCase(), now)),
    )
    expect(taken.filter((overlayId) => overlayId !== null)).toHaveLength(3)
    const listed = await ask(listCodes, { slug: 'tides' }, { token: tokens.read })
    expect(listed.body.items.find((item: { id: string }) => item.id === id)).toMatchObject({
      used: 3,
      state: 'used',
    })
  })

  it('give a use back when the enrolment fails', async () => {
    const { code } = await create(1)
    await fork()
      .transactional(async (tx) => {
        await takeJoiningCode(tx, code, now)
        throw new Error('enrolment failed')
      })
      .catch(() => undefined)
    expect(await takeJoiningCode(fork(), code, now)).not.toBe(null)
  })

  it('do not open once expired or revoked, nor when unknown', async () => {
    const { code } = await create(5)
    expect(await takeJoiningCode(fork(), code, new Date(now.getTime() + 2 * 3_600_000))).toBe(null)
    const revoked = await create(5)
    const params = { slug: 'tides', id: revoked.id }
    const answer = await ask(revokeCode, params, { token: tokens.write, method: 'DELETE' })
    expect([answer.status, answer.body.state]).toEqual([200, 'revoked'])
    expect(await takeJoiningCode(fork(), revoked.code, now)).toBe(null)
    expect(await takeJoiningCode(fork(), '00000-00000-00000-00000', now)).toBe(null)
  })

  it('of one overlay cannot be revoked through another', async () => {
    const { id, code } = await create(1)
    const answer = await ask(revokeCode, { slug: 'berths', id }, { token: tokens.write, method: 'DELETE' })
    expect(answer.status).toBe(404)
    expect(await takeJoiningCode(fork(), code, now)).not.toBe(null)
  })
})

describe('the audit log', () => {
  it('says who did what, and what was refused, to those who may read it', async () => {
    const log = await listAudit(await callAsUser(database, ours.members[0]!.userId, now), {
      action: 'overlay.create',
    })
    const lines = log.items.map(({ actor, subject, outcome, data }) => [
      actor,
      subject,
      outcome,
      data?.code ?? null,
    ])
    expect(lines).toContainEqual(['token of operator@harbourline.example', 'tides', 'ok', null])
    expect(lines).toContainEqual(['token of owner@harbourline.example', '', 'denied', 'token-refused'])
    const viewer = await callAsUser(database, ours.members[2]!.userId, now)
    await expect(listAudit(viewer, {})).rejects.toMatchObject({ code: 'forbidden' })
  })

  it('keeps teams apart and filters', async () => {
    const far = await listAudit(await callAsUser(database, theirs.members[0]!.userId, now), {})
    expect(far.items.map(({ subject, outcome }) => [subject, outcome])).toEqual([['tides', 'denied']])
    const own = await callAsUser(database, ours.members[1]!.userId, now)
    const denied = await listAudit(own, { outcome: 'denied', text: 'VIEWER@' })
    expect(denied.items.length).toBeGreaterThan(0)
    expect(denied.items.every(({ actor }) => actor === 'viewer@harbourline.example')).toBe(true)
    expect((await listAudit(own, { text: '%' })).items).toEqual([])
  })

  it('comes in pages without gaps or repeats', async () => {
    const own = await callAsUser(database, ours.members[0]!.userId, now)
    const em = fork()
    for (let n = 0; n < 60; n++)
      em.create(AuditEntrySchema, {
        teamId: ours.teamId,
        at: now,
        actorKind: 'system',
        actor: 'test',
        action: 'page.test',
        subject: `${n}`,
        outcome: 'ok',
      })
    await em.flush()
    const first = await listAudit(own, { action: 'page.test' })
    const second = await listAudit(own, { action: 'page.test', before: Number(first.next) })
    expect(second.next).toBe(null)
    const subjects = [...first.items, ...second.items].map(({ subject }) => Number(subject))
    expect(subjects).toEqual(Array.from({ length: 60 }, (_, n) => 59 - n))
  })
})

describe('the wrapper', () => {
  it('rolls an audited change back with its entry, and enters the failure', async () => {
    const failing = route('overlay.create', {}, async (call) => {
      call.note({ subject: 'rolled back' })
      call.em.create(OverlaySchema, {
        ...overlay('half'),
        pace: 'drill',
        disclosure: 'named',
        weights: 'unit',
        team: ours.teamId,
        publicKey: '',
        privateKey: '',
        createdAt: now,
      })
      await call.em.flush()
      throw new Error('half way')
    })
    const { status, body } = await ask(failing, {}, { token: tokens.write, method: 'POST' })
    expect([status, body.code]).toEqual([500, 'internal'])
    expect(JSON.stringify(body)).not.toContain('half way')
    expect(await fork().count(OverlaySchema, { slug: 'half' })).toBe(0)
    expect(await fork().findOneOrFail(AuditEntrySchema, { subject: 'rolled back' })).toMatchObject({
      outcome: 'failed',
    })
  })

  it('notices a data function that forgot to authorise', async () => {
    const forgetful = route('overlay.read', {}, async () => ({ secret: true }))
    const before = runtime.failures.length
    const { status, body } = await ask(forgetful, {}, { token: tokens.read })
    expect([status, body.secret]).toEqual([500, undefined])
    expect(runtime.failures.length).toBe(before + 1)
  })

  it('serves agents by their own proof and ignores cookies and tokens there', async () => {
    const agents = route(
      'agent.report',
      {
        authenticate: async (_em, { facts }) => {
          if (facts.bearer !== 'agent-token') throw new AppError('unknown-agent', 'Enrol first.')
          return { kind: 'agent', agentId: 'a', overlayId: 'o', teamId: null, name: 'tar-01' }
        },
      },
      async (call) => {
        call.checked.add('agent.report')
        return { name: call.caller.kind === 'agent' ? call.caller.name : null }
      },
    )
    expect((await ask(agents, {}, { token: 'agent-token', method: 'POST', origin: null })).body).toEqual({
      name: 'tar-01',
    })
    expect(
      (await ask(agents, {}, { token: tokens.write, cookie: cookies.owner, method: 'POST' })).body.code,
    ).toBe('unknown-agent')
  })

  it('renews a session’s cookie on the way', async () => {
    const { value } = await createSession(fork(), ours.members[1]!.userId, false)
    await fork().getConnection().execute(`update sessions set expires_at = now() + interval '1 day'`)
    const { headers } = await ask(listOverlays, {}, { cookie: value })
    expect(headers.get('set-cookie')).toMatch(
      new RegExp(`^${SESSION_COOKIE}=${value}; Path=/; Max-Age=1209600; SameSite=Lax; HttpOnly$`),
    )
  })

  it('answers health without a caller', async () => {
    now = new Date('2026-12-01T10:00:01.000Z')
    expect((await ask(health, {})).body).toEqual({ status: 'ok', at: '2026-12-01T10:00:01.000Z' })
  })
})
