import { createServer, type IncomingMessage, type Server, type ServerResponse } from 'node:http'
import { AppError } from '@/lib/http/app-error'
import { PROBLEM_MEDIA_TYPE, problemResponse, toProblem } from '@/lib/http/problem'
import type { RouteHandler } from '@/lib/http/route'

/** Handlers by method and path, such as "POST /api/agent/report". */
export type Routes = Readonly<Record<string, RouteHandler>>

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

async function answerTo(message: IncomingMessage, handler: RouteHandler): Promise<Response> {
  let request: Request
  try {
    request = toRequest(message)
  } catch {
    return problemResponse(
      new AppError('invalid-input', 'The address or a header cannot be read. Correct it.'),
    )
  }
  return handler(request, { params: Promise.resolve({}) })
}

function toRequest(message: IncomingMessage): Request {
  // RFC 9112, section 3.2 (from memory): a Host that is none is answered with 400.
  if (!URL.canParse(`http://${message.headers.host ?? 'localhost'}`)) throw new Error('Host is no host.')
  const headers = new Headers()
  for (const [name, value] of Object.entries(message.headers))
    if (value !== undefined) headers.set(name, Array.isArray(value) ? value.join(', ') : value)
  const url = new URL(message.url ?? '/', 'http://collector.invalid')
  const hasBody = message.method !== 'GET' && message.method !== 'HEAD'
  const body = hasBody ? { body: bodyOf(message), duplex: 'half' as const } : {}
  return new Request(url, { method: message.method ?? 'GET', headers, ...body })
}

function bodyOf(message: IncomingMessage): ReadableStream<Uint8Array> {
  return new ReadableStream<Uint8Array>({
    start(controller) {
      message.on('data', (chunk: Buffer) => controller.enqueue(chunk))
      message.on('end', () => controller.close())
      message.on('error', (error) => controller.error(error))
    },
    cancel() {
      message.removeAllListeners('data')
      message.removeAllListeners('end')
      message.resume()
    },
  })
}

async function send(response: ServerResponse, answer: Response): Promise<void> {
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
