import { ACTING_COOKIE, readCookie, SESSION_COOKIE } from '@/lib/auth/cookie'

/** What the checks need to know of a request, wherever it came from. */
export interface RequestFacts {
  sessionId: string | null
  bearer: string | null
  /** The short name of the team that the person chose to act for. */
  actingFor?: string | null
  /** True for methods that may change something. */
  unsafe: boolean
  /** True when a browser says, or cannot deny, that another site made it send the request. */
  foreign: boolean
  /** Scheme and host people reach the server by. */
  origin: string
  secure: boolean
  /** The client's network address, where a trusted proxy says it: what a client says of itself is no address. */
  address: string | null
}

/** What requests cannot say of the server. */
export interface ServerSetup {
  /** The address people use, such as https://thinspan.example.org; null: take it from each request. */
  address: string | null
  /** How many proxies stand in front of the server, each of which appends to X-Forwarded-For. */
  trustedProxies: number
}

const SAFE_METHODS = ['GET', 'HEAD', 'OPTIONS']

export function requestFacts(
  headers: Pick<Headers, 'get'>,
  method: string,
  { address, trustedProxies }: ServerSetup,
): RequestFacts {
  const origin = address ? new URL(address).origin : originSaid(headers)
  const authorization = headers.get('authorization')
  return {
    sessionId: readCookie(headers.get('cookie'), SESSION_COOKIE),
    actingFor: readCookie(headers.get('cookie'), ACTING_COOKIE),
    bearer: authorization === null ? null : (/^Bearer +(\S+) *$/i.exec(authorization)?.[1] ?? ''),
    unsafe: !SAFE_METHODS.includes(method),
    foreign: isForeign(headers, origin),
    origin,
    secure: origin.startsWith('https:'),
    address: addressSaid(headers.get('x-forwarded-for'), trustedProxies),
  }
}

function originSaid(headers: Pick<Headers, 'get'>): string {
  const scheme = headers.get('x-forwarded-proto')?.split(',')[0]?.trim() === 'https' ? 'https' : 'http'
  const origin = `${scheme}://${headers.get('host') ?? 'localhost'}`
  return URL.canParse(origin) ? origin : `${scheme}://localhost`
}

/** Each proxy appends whom it was called by, so the outermost trusted one wrote that many entries from the end. */
function addressSaid(forwardedFor: string | null, trustedProxies: number): string | null {
  if (trustedProxies === 0) return null
  return forwardedFor?.split(',').at(-trustedProxies)?.trim() || null
}

/**
 * Browsers send Origin with every request that is not GET or HEAD (Fetch standard, "append a request Origin
 * header"), so one without it is refused too: no browser of ours sent it. Hosts are compared, not schemes,
 * as a proxy that ends TLS may not pass the scheme on.
 */
function isForeign(headers: Pick<Headers, 'get'>, origin: string): boolean {
  const site = headers.get('sec-fetch-site')
  if (site && site !== 'same-origin') return true
  const claimed = headers.get('origin')
  if (!claimed || !URL.canParse(claimed)) return true
  return new URL(claimed).host !== new URL(origin).host
}
