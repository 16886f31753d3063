/**
 * The policy for pages. Scripts and styles run by nonce only: Next puts it on what it emits, and
 * 'strict-dynamic' extends it to what those scripts load. Style attributes in markup are refused too.
 * In development Next evaluates code and injects style elements.
 */
export function contentSecurityPolicy(nonce: string, development: boolean): string {
  return [
    "default-src 'self'",
    `script-src 'nonce-${nonce}' 'strict-dynamic'${development ? " 'unsafe-eval'" : ''}`,
    development ? "style-src 'self' 'unsafe-inline'" : `style-src 'self' 'nonce-${nonce}'`,
    "img-src 'self' data: blob:",
    "font-src 'self'",
    `connect-src 'self'${development ? ' ws:' : ''}`,
    "object-src 'none'",
    "base-uri 'none'",
    "form-action 'self'",
    "frame-ancestors 'none'",
  ].join('; ')
}

/** Nothing that the API answers is meant to be looked at as a page. */
export const API_CONTENT_SECURITY_POLICY = "default-src 'none'; frame-ancestors 'none'"

/** For files that are handed back to be saved: they run nothing and reach nothing, should a browser show them all the same. */
export const ATTACHMENT_CONTENT_SECURITY_POLICY = "default-src 'none'; frame-ancestors 'none'; sandbox"

const ATTACHMENTS = [/^\/incidents\/[^/]+\/files\//, /\/report\.pdf$/]

/** The policy that does not depend on the request, or null for a page. The request filter's is the one that goes out. */
export function fixedPolicy(path: string): string | null {
  if (path.startsWith('/api/') || path === '/openapi.json') return API_CONTENT_SECURITY_POLICY
  return ATTACHMENTS.some((pattern) => pattern.test(path)) ? ATTACHMENT_CONTENT_SECURITY_POLICY : null
}

export function securityHeaders(secure: boolean): Record<string, string> {
  return {
    'x-content-type-options': 'nosniff',
    'x-frame-options': 'DENY',
    'referrer-policy': 'same-origin',
    'permissions-policy': 'camera=(), geolocation=(), microphone=(), payment=(), usb=()',
    'cross-origin-opener-policy': 'same-origin',
    'cross-origin-resource-policy': 'same-origin',
    // Over plain http browsers ignore it, and behind a proxy that ends TLS it must still be there.
    ...(secure ? { 'strict-transport-security': 'max-age=31536000; includeSubDomains' } : {}),
  }
}

const OPEN_PATHS = [
  '/icon.svg',
  '/openapi.json',
  '/sign-in',
  '/first-run',
  '/set-password/',
  '/api/',
  '/agent/',
]

/** Where the request filter sends a request: a visitor without a session cookie to sign in; null lets it through. */
export function redirectFor(path: string, search: string, hasCookie: boolean): string | null {
  if (path === '/') return hasCookie ? '/overlays' : '/sign-in'
  if (hasCookie || OPEN_PATHS.some((open) => path === open || (open.endsWith('/') && path.startsWith(open))))
    return null
  return `/sign-in?next=${encodeURIComponent(path + search)}`
}

/** A path on this server to go to after signing in; anything else becomes the overlays. */
export function safeNext(next: string | undefined): string {
  const base = 'http://thinspan.invalid'
  if (!next?.startsWith('/') || !URL.canParse(next, base)) return '/overlays'
  const url = new URL(next, base)
  return url.origin === base && !url.pathname.startsWith('//') ? url.pathname + url.search : '/overlays'
}
