import { createServer, type RequestListener, type Server } from 'node:http'
import type { AddressInfo } from 'node:net'
import { buffer } from 'node:stream/consumers'
import { gunzipSync } from 'node:zlib'
import { afterEach, describe, expect, test } from 'vitest'
import { createClock, createHttpCollector, createPost } from '@/agent'
import { MAX_REPLY_BYTES } from '@/agent/collector/http-client'
import { someReport } from '../support/reports'

const clock = createClock({ monotonicMs: () => performance.now(), epochMs: () => Date.now() })
const never = new AbortController().signal
const request = {
  agentId: 'agent-tar-01',
  at: '2031-05-06T12:00:00.000Z',
  nonce: 'AAAAAAAAAAAAAAAAAAAAAA',
  signature: '',
}
const grant = { pass: 'pass', passExpiresAt: '2031-05-07T12:00:00.000Z' }
const reply = {
  token: 'token',
  expiresAt: '2031-05-06T13:00:00.000Z',
  serverTime: '2031-05-06T12:00:00.000Z',
  disclosure: 'sealed',
  pace: 'drill',
  ...grant,
}

describe('a collector that', () => {
  const servers: Server[] = []
  afterEach(() => {
    for (const server of servers.splice(0)) {
      server.closeAllConnections()
      server.close()
    }
  })
  async function collectorWhere(listener: RequestListener, init: { timeoutMs?: number } = {}) {
    // Longer than a process may stand still between two requests.
    const server = createServer({ keepAliveTimeout: 600_000 }, listener)
    servers.push(server)
    await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve))
    const { port } = server.address() as AddressInfo
    return createHttpCollector(
      { post: createPost(), clock },
      { baseUrl: `http://127.0.0.1:${port}`, ...init },
    )
  }
  const answering = (status: number, body: string) =>
    collectorWhere((_, response) => response.writeHead(status).end(body))

  test('answers well is believed', async () => {
    const collector = await answering(200, JSON.stringify(reply))
    expect(await collector.session(request, never)).toEqual({ ok: true, value: reply })
  })

  test('refuses is quoted', async () => {
    const problem = {
      status: 403,
      title: 'No',
      detail: 'The agent was revoked.',
      code: 'revoked',
      retry: false,
    }
    const collector = await answering(403, JSON.stringify({ type: 'about:blank', ...problem }))
    expect(await collector.session(request, never)).toEqual({
      ok: false,
      error: { code: 'refused', problem },
    })
  })

  test('has a directory is asked by GET, with the token and what is known of it', async () => {
    const asked: (string | undefined)[][] = []
    const collector = await collectorWhere((request, response) => {
      const { authorization, 'if-none-match': known, 'content-type': type } = request.headers
      asked.push([request.method, request.url, authorization, known, type])
      if (known === '"7"') response.writeHead(304, { etag: '"7"' }).end()
      else response.writeHead(200, { etag: '"7"' }).end('{"items":[]}')
    })
    const first = { etag: '"7"', directory: { items: [] } }
    expect(await collector.directory(null, 'token', never)).toEqual({ ok: true, value: first })
    const same = { etag: '"7"', directory: null }
    expect(await collector.directory('"7"', 'token', never)).toEqual({ ok: true, value: same })
    expect(asked).toEqual([
      ['GET', '/api/agent/directory', 'Bearer token', undefined, undefined],
      ['GET', '/api/agent/directory', 'Bearer token', '"7"', undefined],
    ])
  })

  describe('is sent reports', () => {
    const { sums, ...rest } = someReport(7)
    const colonies = Array.from({ length: 9 }, (_, colony) => ({ ...sums.colonies[0]!, colony }))
    const sent = { ...rest, sums: { ...sums, colonies }, protocol: 2 }
    const answer = { orders: null, ordersAgeMs: 0 }
    /** Servers one after the other behind one address, and what came to them. */
    async function servers(...kinds: ('new' | 'old')[]) {
      const came: { encoding: string | undefined; bytes: number; isWhole: boolean }[] = []
      const collector = await collectorWhere(async (request, response) => {
        const kind = kinds[Math.min(came.length, kinds.length - 1)]
        const bytes = await buffer(request)
        const encoding = request.headers['content-encoding']
        const plain = encoding === 'gzip' && kind === 'new' ? gunzipSync(bytes) : bytes
        const isWhole = plain.toString('utf8') === JSON.stringify(sent)
        came.push({ encoding, bytes: bytes.length, isWhole })
        const headers = kind === 'new' ? { 'accept-encoding': 'gzip' } : {}
        const problem = { status: 400, title: 'The body is not JSON', detail: '', code: 'malformed-json' }
        if (isWhole) response.writeHead(200, headers).end(JSON.stringify(answer))
        else response.writeHead(400, headers).end(JSON.stringify({ ...problem, retry: false }))
      })
      return { collector, came }
    }

    test('packed, once it has said that it unpacks them', async () => {
      const { collector, came } = await servers('new')
      for (let count = 0; count < 3; count++)
        expect(await collector.report(sent, 'token', never)).toEqual({ ok: true, value: answer })
      expect(came.map(({ encoding, isWhole }) => [encoding, isWhole])).toEqual([
        [undefined, true],
        ['gzip', true],
        ['gzip', true],
      ])
      expect(came[1]?.bytes).toBeLessThan((came[0]?.bytes ?? 0) / 2)
    })

    test('as they are, where it says nothing of the kind', async () => {
      const { collector, came } = await servers('old')
      for (let count = 0; count < 2; count++) await collector.report(sent, 'token', never)
      expect(came.map(({ encoding }) => encoding)).toEqual([undefined, undefined])
    })

    test('anew as they are, where an older one has taken its place', async () => {
      const { collector, came } = await servers('new', 'old')
      for (let count = 0; count < 3; count++)
        expect(await collector.report(sent, 'token', never)).toEqual({ ok: true, value: answer })
      expect(came.map(({ encoding, isWhole }) => [encoding, isWhole])).toEqual([
        [undefined, true],
        ['gzip', false],
        [undefined, true],
        [undefined, true],
      ])
    })
  })

  test('says 304 unasked is no collector', async () => {
    const collector = await answering(304, '')
    expect(await collector.directory(null, 'token', never)).toMatchObject({
      ok: false,
      error: { code: 'bad-reply', status: 304 },
    })
  })

  test.each([
    ['answers with a page', 200, '<html></html>', 'not JSON'],
    ['fails without problem details', 502, '{"error": "bad gateway"}', 'an error without problem details'],
    ['leaves the token out', 200, JSON.stringify({ ...reply, token: undefined }), 'token'],
    ['answers without end', 200, `"${'x'.repeat(MAX_REPLY_BYTES)}"`, 'more than'],
  ])('%s is no collector', async (_, status, body, issue) => {
    const collector = await answering(status, body)
    expect(await collector.session(request, never)).toEqual({
      ok: false,
      error: { code: 'bad-reply', status, issue: expect.stringContaining(issue) },
    })
  })

  test('says nothing times out', async () => {
    const collector = await collectorWhere(() => {}, { timeoutMs: 50 })
    expect(await collector.session(request, never)).toEqual({
      ok: false,
      error: { code: 'timeout', timeoutMs: 50 },
    })
  })

  test('is asked no longer when the agent stops', async () => {
    const stopping = new AbortController()
    const collector = await collectorWhere(() => stopping.abort())
    expect(await collector.session(request, stopping.signal)).toEqual({
      ok: false,
      error: { code: 'unreachable', reason: 'stopped' },
    })
  })

  test('hangs up on an idle connection is asked again on a new one, once', async () => {
    let asked = 0
    const collector = await collectorWhere((incoming, response) => {
      asked += 1
      if (asked === 2) incoming.socket.destroy()
      else response.end(JSON.stringify(reply))
    })
    expect(await collector.session(request, never)).toMatchObject({ ok: true })
    expect(await collector.session(request, never)).toMatchObject({ ok: true })
    expect(asked).toBe(3)
  })

  test('hangs up on a new connection is not reached', async () => {
    const collector = await collectorWhere((incoming) => incoming.socket.destroy())
    expect(await collector.session(request, never)).toEqual({
      ok: false,
      error: { code: 'unreachable', reason: 'socket hang up' },
    })
  })
})
