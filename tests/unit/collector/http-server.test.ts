import { once } from 'node:events'
import { connect } from 'node:net'
import { text } from 'node:stream/consumers'
import { afterEach, beforeEach, describe, expect, it } from 'vitest'
import { createRouteServer, type Routes } from '@/lib/collector/http-server'
import { asAppError, problemResponse } from '@/lib/http/problem'

const BODY_MOST_BYTES = 8

const echo: Routes[string] = {
  answer: async (asked) => {
    const bytes = await asked.bytes(BODY_MOST_BYTES).catch(asAppError)
    if (bytes instanceof Error) return problemResponse(bytes)
    const body = new TextDecoder().decode(bytes)
    const headers = { 'content-type': 'application/json' }
    return { status: 200, headers, body: JSON.stringify({ url: asked.url, body }) }
  },
}
const unchanged: Routes[string] = {
  answer: async (asked) =>
    new Response(null, {
      status: asked.headers.get('If-None-Match') === '"a"' ? 304 : 200,
      headers: { etag: '"a"' },
    }),
}
let server: ReturnType<typeof createRouteServer>
let port: number

beforeEach(async () => {
  server = createRouteServer({ 'POST /echo': echo, 'GET /unchanged': unchanged })
  server.listen(0, '127.0.0.1')
  await once(server, 'listening')
  const address = server.address()
  port = typeof address === 'object' && address ? address.port : 0
})
afterEach(async () => {
  server.close()
  await once(server, 'close')
})

/** What comes back for these very bytes. */
async function say(lines: string[], body = ''): Promise<{ status: number; body: unknown }> {
  const socket = connect(port, '127.0.0.1')
  socket.write(
    `${[...lines, 'connection: close', `content-length: ${body.length}`].join('\r\n')}\r\n\r\n${body}`,
  )
  const [head = '', ...rest] = (await text(socket)).split('\r\n\r\n')
  const sent = rest.join('').replace(/^[0-9a-f]+\r\n|\r\n0$/g, '')
  return { status: Number(head.split(' ')[1]), body: JSON.parse(sent) }
}

describe('the server of a collector alone', () => {
  it('hands a request to its handler', async () => {
    const answer = await say(['POST /echo?a=b HTTP/1.1', 'host: collector.test:3100'], 'tide')
    expect(answer).toEqual({ status: 200, body: { url: 'http://collector.invalid/echo?a=b', body: 'tide' } })
  })

  it('refuses a body that is too long, said to be or not, and goes on', async () => {
    const long = await say(['POST /echo HTTP/1.1', 'host: collector.test'], 'high tide at noon')
    expect(long).toMatchObject({ status: 413, body: { code: 'too-large' } })
    const unsaid = await fetch(`http://127.0.0.1:${port}/echo`, {
      method: 'POST',
      body: new Blob(['high tide', ' at noon']).stream(),
      duplex: 'half',
    } as RequestInit)
    expect(unsaid.status).toBe(413)
    expect((await say(['POST /echo HTTP/1.1', 'host: collector.test'], 'ebb')).status).toBe(200)
  })

  it('answers without a body where nothing has changed', async () => {
    const ask = (tag: string) =>
      fetch(`http://127.0.0.1:${port}/unchanged`, { headers: { 'if-none-match': tag } })
    const answers = [await ask('"a"'), await ask('"b"')]
    expect(answers.map(({ status, headers }) => [status, headers.get('etag')])).toEqual([
      [304, '"a"'],
      [200, '"a"'],
    ])
  })

  it('says 404 for anything else', async () => {
    expect(await say(['POST // HTTP/1.1', 'host: collector.test'])).toMatchObject({
      status: 404,
      body: { code: 'not-found' },
    })
  })

  it('outlives a host that is none, and says 400', async () => {
    const bad = await say(['POST /echo HTTP/1.1', 'host: ]['], 'tide')
    expect(bad).toMatchObject({ status: 400, body: { code: 'invalid-input' } })
    expect((await say(['POST /echo HTTP/1.1', 'host: collector.test'])).status).toBe(200)
  })
})
