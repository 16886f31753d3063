import { gzipSync } from 'node:zlib'
import { describe, expect, it } from 'vitest'
import { z } from 'zod'
import { canonicalJoiningCode, hashJoiningCode, newJoiningCode } from '@/lib/auth/secrets'
import { THROTTLE, throttleKeys } from '@/lib/auth/throttle'
import { problemSchema } from '@/lib/data/dto'
import { stateOf } from '@/lib/data/joining-codes'
import { slugFrom } from '@/lib/data/teams'
import { reconnectDelayMs } from '@/lib/db/listener'
import { AppError } from '@/lib/http/app-error'
import { askedOf } from '@/lib/http/asked'
import { readJson } from '@/lib/http/body'
import { invalidInput, problemResponse, toProblem } from '@/lib/http/problem'

describe('the throttling plan', () => {
  it('counts an attempt against the e-mail address, however it is written, and the network address', () => {
    const kinds = (attempt: Parameters<typeof throttleKeys>[0]) =>
      throttleKeys(attempt).map(({ kind }) => kind)
    expect(kinds({ email: 'a@b.example', address: '192.0.2.1' })).toEqual(['email', 'address'])
    expect(kinds({ email: 'a@b.example', address: null })).toEqual(['email', 'unknown'])
    const [one] = throttleKeys({ email: ' A@B.example ', address: null })
    const [two] = throttleKeys({ email: 'a@b.example', address: null })
    expect(one).toEqual(two)
  })

  it('stores neither of them', () => {
    expect(JSON.stringify(throttleKeys({ email: 'a@b.example', address: '192.0.2.1' }))).not.toMatch(
      /b\.example|192/,
    )
  })

  it('leaves a shared network address more attempts than one person needs', () => {
    expect(THROTTLE.address.attempts).toBeGreaterThan(THROTTLE.email.attempts)
  })
})

describe('a joining code', () => {
  it('is four groups of five characters without look-alikes', () => {
    const codes = Array.from({ length: 200 }, newJoiningCode)
    for (const code of codes) expect(code).toMatch(/^([0-9A-HJKMNP-TV-Z]{5}-){3}[0-9A-HJKMNP-TV-Z]{5}$/)
    expect(new Set(codes).size).toBe(200)
    // 4,000 draws from 32 characters: one that is missing has probability 32·(31/32)^4000 < 1e-53.
    expect(new Set(codes.join('').replaceAll('-', '')).size).toBe(32)
  })

  it('is recognised however it is typed', () => {
    expect(canonicalJoiningCode('oil10-abcde fghjk-mnpqr')).toBe('01110ABCDEFGHJKMNPQR')
    expect(hashJoiningCode('0111O-ABCDE-FGHJK-MNPQR')).toBe(hashJoiningCode('01110abcdefghjkmnpqr'))
  })

  it.each([
    ['open', {}],
    ['used', { used: 3 }],
    ['expired', { expiresAt: new Date('2026-12-01T00:00:00Z') }],
    ['revoked', { revokedAt: new Date('2026-11-30T00:00:00Z'), used: 3 }],
  ])('is %s', (state, changes) => {
    const code = {
      revokedAt: null,
      used: 2,
      uses: 3,
      expiresAt: new Date('2026-12-02T00:00:00Z'),
      ...changes,
    }
    expect(stateOf(code, new Date('2026-12-01T00:00:00Z'))).toBe(state)
  })
})

describe('short names of teams', () => {
  it.each([
    ['Harbourline', 'harbourline'],
    ['Pinnet Bay & Söhne', 'pinnet-bay-sohne'],
    ['  – ', 'team'],
    ['x'.repeat(60), 'x'.repeat(40)],
  ])('%j becomes %j', (name, slug) => expect(slugFrom(name)).toBe(slug))
})

describe('problems', () => {
  it('carry code, advice and extra members, and fit the published schema', () => {
    const problem = toProblem(
      new AppError('clock-skew', 'Set the clock.', { members: { serverTime: 'now' } }),
    )
    expect(problemSchema.parse(problem)).toMatchObject({ status: 401, code: 'clock-skew', retry: true })
    expect(problem.serverTime).toBe('now')
  })

  it('never let an extra member take the place of a standard one', () => {
    expect(toProblem(new AppError('not-found', 'Gone.', { members: { status: 200 } })).status).toBe(404)
  })

  it('say nothing of what an unexpected error was about', async () => {
    const response = problemResponse(new Error('secret table name'))
    expect(response.status).toBe(500)
    expect(await response.text()).not.toMatch(/secret/)
  })

  it('call a lost database unavailable and say when to come back', () => {
    const response = problemResponse(Object.assign(new Error('connect'), { code: 'ECONNREFUSED' }))
    expect([response.status, response.headers.get('retry-after')]).toEqual([503, '2'])
  })

  it('that came of a database that went away say when to come back, whatever the driver calls it', () => {
    const coded = (code: string) => Object.assign(new Error('of the driver'), { code })
    const away = [
      new Error('Connection terminated unexpectedly'),
      new Error('select 1 from berths - Connection terminated unexpectedly'),
      new Error('begin; - Client has encountered a connection error and is not queryable'),
      Object.assign(new Error('no connection was free'), { name: 'KnexTimeoutError' }),
      ...['57P01', '57P02', '57P03', '57014', '53300', '25P03', '08006', 'EPIPE'].map(coded),
    ]
    for (const error of away) {
      const { status, headers } = problemResponse(error)
      expect([status, headers.get('retry-after')]).toEqual([503, '2'])
    }
    for (const error of [coded('23505'), coded('42P01'), new Error('Connection terminated? Hardly.')])
      expect(problemResponse(error).status).toBe(500)
  })

  it('name each field that was wrong', () => {
    const result = z.object({ a: z.object({ b: z.number() }) }).safeParse({ a: { b: 'x' } })
    expect(invalidInput(result.error!).data.errors).toMatchObject([{ path: 'a.b' }])
  })
})

describe('a JSON body', () => {
  const post = (
    body: BodyInit | null,
    headers: Record<string, string> = { 'content-type': 'application/json' },
  ) => new Request('http://t/', { method: 'POST', body, headers, duplex: 'half' } as RequestInit)

  it('is read', async () => expect(await readJson(askedOf(post('{"a":1}')))).toEqual({ a: 1 }))
  it('may begin with a byte order mark, and keeps what is in it', async () => {
    expect(await readJson(askedOf(post('\uFEFF{"a":"Tärn \u{1F30A}"}')))).toEqual({ a: 'Tärn \u{1F30A}' })
  })
  it('must be JSON', async () =>
    await expect(readJson(askedOf(post('{"a":')))).rejects.toMatchObject({ code: 'malformed-json' }))
  it('must be there', async () =>
    await expect(readJson(askedOf(post(null)))).rejects.toMatchObject({ code: 'malformed-json' }))
  it('must say that it is JSON', async () =>
    await expect(readJson(askedOf(post('{}', { 'content-type': 'text/plain' })))).rejects.toMatchObject({
      code: 'wrong-media-type',
    }))

  it('over the limit is given up as it arrives', async () => {
    let sent = 0
    const endless = new ReadableStream({
      pull(controller) {
        sent += 1000
        controller.enqueue(new Uint8Array(1000).fill(32))
      },
    })
    await expect(readJson(askedOf(post(endless)), 10_000)).rejects.toMatchObject({ code: 'too-large' })
    expect(sent).toBeLessThan(20_000)
  })

  const packed = (bytes: Uint8Array<ArrayBuffer>, encoding = 'gzip') =>
    post(new Blob([bytes]), { 'content-type': 'application/json', 'content-encoding': encoding })
  const gzip = (text: string) => new Uint8Array(gzipSync(text))

  it('may come packed', async () => expect(await readJson(packed(gzip('{"a":1}')))).toEqual({ a: 1 }))
  it('packed in another way is refused', async () =>
    await expect(readJson(packed(gzip('{"a":1}'), 'br'))).rejects.toMatchObject({
      code: 'wrong-encoding',
      detail: expect.stringContaining('content-encoding: gzip'),
    }))
  it('that is not what it says, or is cut short, is refused', async () => {
    for (const bytes of [new Uint8Array(Buffer.from('{"a":1}')), gzip('{"a":1}').slice(0, -9)])
      await expect(readJson(packed(bytes))).rejects.toMatchObject({ code: 'malformed-gzip' })
  })
  it('of few bytes that would become many is unpacked to the limit and no further', async () => {
    const bomb = gzip(JSON.stringify('tide'.repeat(1_000_000)))
    expect(bomb.length).toBeLessThan(10_000)
    await expect(readJson(packed(bomb), 10_000)).rejects.toMatchObject({
      code: 'too-large',
      detail: 'Send at most 10000 bytes, counted before they are packed.',
    })
    expect(await readJson(packed(gzip(JSON.stringify('t'.repeat(9_998)))), 10_000)).toHaveLength(9_998)
  })
})

describe('the database’s housekeeping', () => {
  it('reconnects after ever longer waits, up to a limit', () => {
    expect([0, 1, 2, 10].map((attempt) => reconnectDelayMs(attempt, 1))).toEqual([200, 400, 800, 5000])
    expect(reconnectDelayMs(0, 0)).toBe(100)
  })
})
