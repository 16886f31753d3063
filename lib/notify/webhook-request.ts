import { lookup } from 'node:dns'
import { request as httpRequest } from 'node:http'
import { request as httpsRequest } from 'node:https'
import { isIP, type LookupFunction } from 'node:net'

/** Enough to say what went wrong; nobody may fill the log. */
export const ANSWER_MOST_BYTES = 2_048

export class AddressRefused extends Error {}

export interface PostInit {
  url: URL
  headers: Record<string, string>
  body: string
  /** Whether a network address may be connected to: asked for the very address that is then connected to. */
  mayReach(address: string): boolean
  /** As `dns.lookup`, for tests. */
  resolve?: typeof lookup
}

export interface PostAnswer {
  status: number
  retryAfter: string | null
  /** The beginning of it. */
  text: string
}

/** An error, and whether the request may have reached somebody. */
export class PostFailed extends Error {
  constructor(
    readonly reason: Error,
    readonly hasLeft: boolean,
  ) {
    super(reason.message)
  }
}

/** Posts once, on a connection of its own, and follows nothing. @throws AddressRefused, PostFailed */
export function post(init: PostInit, signal: AbortSignal): Promise<PostAnswer> {
  const { url, headers, body, mayReach } = init
  const host = url.hostname.replace(/^\[(.*)\]$/, '$1')
  // A literal is connected to without being looked up.
  if (isIP(host) !== 0 && !mayReach(host)) return Promise.reject(refusal(host))
  return new Promise((resolve, reject) => {
    let hasLeft = false
    const fail = (error: Error) =>
      reject(error instanceof AddressRefused ? error : new PostFailed(error, hasLeft))
    const send = url.protocol === 'https:' ? httpsRequest : httpRequest
    const request = send(url, {
      method: 'POST',
      headers: { ...headers, 'content-length': String(Buffer.byteLength(body)) },
      agent: false,
      lookup: guardedLookup(mayReach, init.resolve ?? lookup),
      signal,
    })
    request.on('error', fail)
    request.on('socket', (socket) => {
      socket.once(url.protocol === 'https:' ? 'secureConnect' : 'connect', () => {
        hasLeft = true
      })
    })
    request.on('response', (response) => {
      const chunks: Buffer[] = []
      let bytes = 0
      const finish = () => {
        const text = Buffer.concat(chunks).subarray(0, ANSWER_MOST_BYTES).toString('utf8')
        resolve({
          status: response.statusCode ?? 0,
          retryAfter: response.headers['retry-after'] ?? null,
          text,
        })
        request.destroy()
      }
      response.on('data', (chunk: Buffer) => {
        chunks.push(chunk)
        bytes += chunk.length
        if (bytes >= ANSWER_MOST_BYTES) finish()
      })
      response.on('end', finish)
      // The status has been said, which is all that counts.
      response.on('error', finish)
    })
    request.end(body)
  })
}

/**
 * Resolves and refuses at the moment of connecting: a name that was looked up before could have another address by now.
 */
function guardedLookup(mayReach: (address: string) => boolean, resolve: typeof lookup): LookupFunction {
  return (hostname, options, callback) => {
    resolve(hostname, { ...options, all: true }, (error, addresses) => {
      if (error) return callback(error, [])
      const allowed = addresses.filter(({ address }) => mayReach(address))
      const [first] = allowed
      if (!first) return callback(refusal(hostname), [])
      if (options.all) callback(null, allowed)
      else callback(null, first.address, first.family)
    })
  }
}

function refusal(host: string): AddressRefused {
  return new AddressRefused(
    `${host} is on this server's own network, where webhooks may not reach. The server's operator can allow it: THINSPAN_WEBHOOK_PRIVATE.`,
  )
}
