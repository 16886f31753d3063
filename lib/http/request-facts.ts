import { readCookie, SESSION_COOKIE } from '@/lib/auth/cookie'

/** What the checks need to know of a request, wherever it came from. */
export interface RequestFacts {
  sessionId: string | null
  bearer: string | null
  /** True for methods that may change something. */
  unsafe: boolean
  /** True when a browser says, or cannot deny, that another site made it send the request. */
  foreign: boolean
  /** Scheme and host people reach the server by. */
  origin: string
  secure: boolean
  /** The client's network address as far as it is known. */
  address: string | null
}

const SAFE_METHODS = ['GET', 'HEAD', 'OPTIONS']

export function requestFacts(
  headers: Headers,
  method: string,
  configuredAddress: string | null,
): RequestFacts {
  const scheme = first(headers.get('x-forwarded-proto')) === 'https' ? 'https' : 'http'
  const origin = configuredAddress
    ? new URL(configuredAddress).origin
    : `${scheme}://${headers.get('host') ?? 'localhost'}`
  const authorization = headers.get('authorization')
  return {
    sessionId: readCookie(headers.get('cookie'), SESSION_COOKIE),
    bearer: authorization === null ? null : (/^Bearer +(\S+) *$/i.exec(authorization)?.[1] ?? ''),
    unsafe: !SAFE_METHODS.includes(method),
    foreign: isForeign(headers, origin),
    origin,
    secure: origin.startsWith('https:'),
    address: first(headers.get('x-forwarded-for')),
  }
}

/**
 * Browsers send Origin with every request that is not GET or HEAD (Fetch standard, "append a request Origin
 * header"), so one without it is refused too: no browser of ours sent it. Hosts are compared, not schemes,
 * as a proxy that ends TLS may not pass the scheme on.
 */
function isForeign(headers: Headers, origin: string): boolean {
  const site = headers.get('sec-fetch-site')
  if (site && site !== 'same-origin') return true
  const claimed = headers.get('origin')
  if (!claimed || !URL.canParse(claimed)) return true
  return new URL(claimed).host !== new URL(origin).host
}

function first(list: string | null): string | null {
  return list?.split(',')[0]?.trim() || null
}
