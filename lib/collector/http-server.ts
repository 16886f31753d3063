import { createServer, type IncomingMessage, type Server, type ServerResponse } from 'node:http'
import { AppError } from '@/lib/http/app-error'
import { type Asked, type PlainAnswer, tooLarge } from '@/lib/http/asked'
import { PROBLEM_MEDIA_TYPE, problemResponse, toProblem } from '@/lib/http/problem'
import type { RouteHandler } from '@/lib/http/route'

/** Handlers by method and path, such as "POST /api/agent/report". */
export type Routes = Readonly<Record<string, Pick<RouteHandler, 'answer'>>>

/** Paths are read below it; nobody is ever asked there. */
const BASE = 'http://collector.invalid'
/** What any host, and any path without a query, looks like that needs no closer look. */
const PLAIN_HOST = /^[a-z0-9.-]+(:\d{1,5})?$/i
const PLAIN_PATH = /^\/[a-z0-9./-]*$/i

/** Serves route handlers without the web framework, which would cost more than the work itself. */
export function createRouteServer(routes: Routes): Server {
  return createServer((message, response) => {
    const path = message.url?.split('?', 1)[0] ?? '/'
    const handler = routes[`${message.method} ${path}`]
    if (!handler) return sayProblem(response, path)
    answerTo(message, handler)
      .then((answer) => send(response, answer))
      .catch(() => response.destroy())
  })
}

async function answerTo(message: IncomingMessage, handler: Routes[string]): Promise<Response | PlainAnswer> {
  const { host } = message.headers
  // RFC 9112, section 3.2 (from memory): a Host that is none is answered with 400.
  if (host !== undefined && !PLAIN_HOST.test(host) && !URL.canParse(`http://${host}`)) return unreadable()
  const url = message.url ?? '/'
  if (!PLAIN_PATH.test(url) && !URL.canParse(url, BASE)) return unreadable()
  return handler.answer(new AskedByMessage(message), { params: Promise.resolve({}) })
}

const unreadable = (): Response =>
  problemResponse(new AppError('invalid-input', 'The address or a header cannot be read. Correct it.'))

/** A request as the plain server has it. */
class AskedByMessage implements Asked {
  readonly #message: IncomingMessage
  readonly headers: Pick<Headers, 'get'>
  #signal: AbortSignal | null = null

  constructor(message: IncomingMessage) {
    this.#message = message
    this.headers = {
      get: (name) => {
        const value = message.headers[name.toLowerCase()]
        return value === undefined ? null : Array.isArray(value) ? value.join(', ') : value
      },
    }
  }

  get url(): string {
    return new URL(this.#message.url ?? '/', BASE).href
  }

  get method(): string {
    return this.#message.method ?? 'GET'
  }

  get signal(): AbortSignal {
    if (this.#signal === null) {
      const gone = new AbortController()
      this.#message.once('close', () => gone.abort())
      this.#signal = gone.signal
    }
    return this.#signal
  }

  bytes(maxBytes: number): Promise<Uint8Array> {
    const message = this.#message
    return new Promise((resolve, reject) => {
      const chunks: Buffer[] = []
      let bytes = 0
      const take = (chunk: Buffer) => {
        bytes += chunk.byteLength
        if (bytes > maxBytes) giveUp()
        else chunks.push(chunk)
      }
      const giveUp = () => {
        message.removeListener('data', take)
        // What comes still is not kept, and the connection stays of use.
        message.resume()
        reject(tooLarge(maxBytes))
      }
      message.on('end', () => resolve(chunks.length === 1 ? chunks[0]! : Buffer.concat(chunks)))
      message.on('error', reject)
      if (Number(message.headers['content-length'] ?? 0) > maxBytes) giveUp()
      else message.on('data', take)
    })
  }
}

async function send(response: ServerResponse, answer: Response | PlainAnswer): Promise<void> {
  if (!(answer instanceof Response)) {
    // With its length said, head and body leave in one piece.
    const body = answer.body ?? ''
    const length = answer.body === null ? {} : { 'content-length': Buffer.byteLength(body) }
    response.writeHead(answer.status, { ...answer.headers, ...length }).end(body)
    return
  }
  response.writeHead(answer.status, Object.fromEntries(answer.headers))
  response.end(Buffer.from(await answer.arrayBuffer()))
}

function sayProblem(response: ServerResponse, path: string): void {
  const problem = toProblem(
    new AppError('not-found', `There is nothing at ${path}. This process serves agents only.`),
  )
  response.writeHead(problem.status, { 'content-type': PROBLEM_MEDIA_TYPE })
  response.end(JSON.stringify(problem))
}
