import { AppError } from './app-error'

/** A request, as far as routes look at it: made from a web Request, or without one by a server that has none. */
export interface Asked {
  readonly url: string
  readonly method: string
  readonly headers: Pick<Headers, 'get'>
  /** Aborts when whoever asked is gone. */
  readonly signal: AbortSignal
  /** The body as it came. @throws AppError as soon as it is over the limit, whatever Content-Length claims */
  bytes(maxBytes: number): Promise<Uint8Array>
}

export interface PlainAnswer {
  status: number
  headers: Record<string, string>
  body: string | null
}

export function askedOf(request: Request): Asked {
  return {
    url: request.url,
    method: request.method,
    headers: request.headers,
    get signal() {
      return request.signal
    },
    bytes: (maxBytes) => readBytes(request, maxBytes),
  }
}

export function responseOf(answer: Response | PlainAnswer): Response {
  return answer instanceof Response
    ? answer
    : new Response(answer.body, { status: answer.status, headers: answer.headers })
}

export const tooLarge = (maxBytes: number) => new AppError('too-large', `Send at most ${maxBytes} bytes.`)

async function readBytes(request: Request, maxBytes: number): Promise<Uint8Array> {
  if (Number(request.headers.get('content-length') ?? 0) > maxBytes) throw tooLarge(maxBytes)
  const chunks: Uint8Array[] = []
  let bytes = 0
  const reader = request.body?.getReader()
  for (let read = await reader?.read(); read && !read.done; read = await reader?.read()) {
    bytes += read.value.byteLength
    if (bytes > maxBytes) {
      await reader?.cancel()
      throw tooLarge(maxBytes)
    }
    chunks.push(read.value)
  }
  return Buffer.concat(chunks)
}
