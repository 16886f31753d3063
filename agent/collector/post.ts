import * as http from 'node:http'
import * as https from 'node:https'

export interface PostInit {
  /** POST unless said otherwise. */
  method?: 'GET' | 'POST'
  headers: Record<string, string>
  /** Empty for a GET. */
  body: string | Uint8Array
  signal: AbortSignal
  maxReplyBytes: number
}

/** `text` is null where the reply was longer than allowed. */
export interface PostReply {
  status: number
  text: string | null
  etag?: string | null
  /** How the server lets bodies be packed (RFC 7694). */
  acceptEncoding?: string | null
}

/** Sends one body and reads one reply. @throws Error where there is none, or when aborted */
export type Post = (url: URL, init: PostInit) => Promise<PostReply>

/**
 * Keeps connections open between calls: at a brisk pace `fetch` costs an agent most of its time.
 * @param init `ca`: PEM certificates of a private authority, trusted instead of the public ones
 */
export function createPost(init: { ca?: string } = {}): Post {
  const agents = {
    http: new http.Agent({ keepAlive: true }),
    https: new https.Agent({ keepAlive: true, ca: init.ca }),
  }
  const post: Post = async (url, init) => {
    for (;;) {
      const result = await attempt(agents, url, init)
      // A server may close an idle connection just as it is used again: that says nothing about the server.
      if (result !== 'stale') return result
    }
  }
  return post
}

function attempt(
  agents: { http: http.Agent; https: https.Agent },
  url: URL,
  init: PostInit,
): Promise<PostReply | 'stale'> {
  return new Promise((resolve, reject) => {
    const isSecure = url.protocol === 'https:'
    const request = (isSecure ? https : http).request(url, {
      method: init.method ?? 'POST',
      agent: isSecure ? agents.https : agents.http,
      headers:
        init.method === 'GET'
          ? init.headers
          : { ...init.headers, 'content-length': Buffer.byteLength(init.body) },
      signal: init.signal,
    })
    let isAnswered = false
    request.on('error', (error) => {
      const wasReset = 'code' in error && error.code === 'ECONNRESET'
      if (wasReset && request.reusedSocket && !isAnswered && !init.signal.aborted) resolve('stale')
      else reject(error)
    })
    request.on('response', (response) => {
      isAnswered = true
      const status = response.statusCode ?? 0
      const { etag = null, 'accept-encoding': packings } = response.headers
      const acceptEncoding = packings?.toString() ?? null
      read(response, init.maxReplyBytes).then(
        (text) => resolve({ status, text, etag, acceptEncoding }),
        reject,
      )
    })
    request.end(init.method === 'GET' ? undefined : init.body)
  })
}

function read(response: http.IncomingMessage, maxBytes: number): Promise<string | null> {
  return new Promise((resolve, reject) => {
    const chunks: Buffer[] = []
    let bytes = 0
    response.on('data', (chunk: Buffer) => {
      bytes += chunk.length
      if (bytes > maxBytes) {
        resolve(null)
        response.destroy()
      } else chunks.push(chunk)
    })
    response.on('end', () => resolve(Buffer.concat(chunks).toString('utf8')))
    response.on('error', reject)
  })
}
