import { once } from 'node:events'
import { createServer, type IncomingMessage, type ServerResponse } from 'node:http'
import { type Kept, type KeptCall, keep } from './kept'
import { portOf } from './port-of'

const BODY_MOST_BYTES = 256 * 1024
/** POST …/Accounts/{sid}/Messages.json, as the SDK asks for it. */
const SMS_PATH = /^\/2010-04-01\/Accounts\/([^/]+)\/Messages\.json$/
/** Where webhooks may be pointed: /webhook answers 204, /webhook/500 answers that. */
const WEBHOOK_PATH = /^\/webhook(?:\/(\d{3}))?$/
/** A number that the service would refuse. */
const REFUSED_NUMBER = /0000$/

export interface FakeHttp {
  /** Scheme, host and port. */
  url: string
  stop(): Promise<void>
}

export interface FakeHttpInit {
  port?: number
  /** For tests: answers calls to /webhook in its own way. True: it did. */
  answer?(call: KeptCall, response: ServerResponse): boolean | Promise<boolean>
}

/** The SMS service and a webhook receiver on loopback, and GET /kept for what they were sent. */
export async function startFakeHttp(
  { kept, now }: { kept: Kept; now(): Date },
  { port = 0, answer = () => false }: FakeHttpInit = {},
): Promise<FakeHttp> {
  const server = createServer((request, response) => {
    serve(request, response).catch(() => response.destroy())
  })
  async function serve(request: IncomingMessage, response: ServerResponse): Promise<void> {
    const path = new URL(request.url ?? '/', 'http://stand-in').pathname
    const isPost = request.method === 'POST'
    const sms = SMS_PATH.exec(path)
    const webhook = WEBHOOK_PATH.exec(path)
    if (request.method === 'GET' && path === '/kept') sendJson(response, { status: 200, value: kept })
    else if (isPost && sms) sendJson(response, await takeSms(request, sms[1] ?? ''))
    else if (isPost && webhook) await takeCall(request, response, { path, status: Number(webhook[1] ?? 204) })
    else sendJson(response, { status: 404, value: { message: 'There is nothing here.' } })
  }

  async function takeCall(
    request: IncomingMessage,
    response: ServerResponse,
    { path, status }: { path: string; status: number },
  ): Promise<void> {
    const headers = Object.fromEntries(
      Object.entries(request.headers).map(([name, value]) => [name, String(value)]),
    )
    const call: KeptCall = { at: now().toISOString(), path, headers, body: await readBody(request), status }
    keep(kept.calls, call)
    if (!(await answer(call, response))) response.writeHead(status).end()
  }

  async function takeSms(request: IncomingMessage, accountSid: string): Promise<JsonAnswer> {
    const form = new URLSearchParams(await readBody(request))
    if (!request.headers.authorization?.startsWith('Basic ')) return refusal(401, 20003, 'Authenticate')
    const to = form.get('To') ?? ''
    if (!/^\+[1-9]\d{6,14}$/.test(to) || REFUSED_NUMBER.test(to))
      return refusal(400, 21211, "The 'To' number is not valid.")
    const text = form.get('Body') ?? ''
    keep(kept.texts, { at: now().toISOString(), from: form.get('From') ?? '', to, text })
    const sid = `SMstandin${String(kept.texts.length).padStart(25, '0')}`
    const status = 'kept on this machine: nobody was sent anything'
    return { status: 201, value: { sid, account_sid: accountSid, status, to, body: text } }
  }

  server.listen(port, '127.0.0.1')
  await once(server, 'listening')
  return {
    url: `http://127.0.0.1:${portOf(server)}`,
    stop: async () => {
      server.closeAllConnections()
      await new Promise((resolve) => server.close(resolve))
    },
  }
}

async function readBody(request: IncomingMessage): Promise<string> {
  const chunks: Buffer[] = []
  let bytes = 0
  for await (const chunk of request) {
    bytes += chunk.length
    if (bytes > BODY_MOST_BYTES) throw new Error('The body is too large.')
    chunks.push(chunk)
  }
  return Buffer.concat(chunks).toString('utf8')
}

interface JsonAnswer {
  status: number
  value: object
}

/** As the service words it. */
function refusal(status: number, code: number, message: string): JsonAnswer {
  return { status, value: { status, code, message } }
}

function sendJson(response: ServerResponse, { status, value }: JsonAnswer): void {
  response.writeHead(status, { 'content-type': 'application/json' }).end(JSON.stringify(value))
}
