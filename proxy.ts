import { type NextRequest, NextResponse } from 'next/server'
import { SESSION_COOKIE } from '@/lib/auth/cookie'
import { contentSecurityPolicy, fixedPolicy, redirectFor, securityHeaders } from '@/lib/http/security-headers'

/** Headers for everything, and a look at whether a cookie is there. Whether it is worth anything is checked later. */
export function proxy(request: NextRequest): NextResponse {
  const { pathname, search } = request.nextUrl
  const secure = (request.headers.get('x-forwarded-proto') ?? request.nextUrl.protocol).startsWith('https')
  const target = redirectFor(pathname, search, request.cookies.has(SESSION_COOKIE))
  const fixed = fixedPolicy(pathname)
  const policy =
    fixed ?? contentSecurityPolicy(btoa(crypto.randomUUID()), process.env.NODE_ENV === 'development')
  const response =
    target === null
      ? pass(request, fixed === null ? policy : null)
      : NextResponse.redirect(new URL(target, request.url))
  response.headers.set('content-security-policy', policy)
  for (const [name, value] of Object.entries(securityHeaders(secure))) response.headers.set(name, value)
  return response
}

/** Next reads the nonce from the policy on the request. */
function pass(request: NextRequest, policy: string | null): NextResponse {
  if (policy === null) return NextResponse.next()
  const headers = new Headers(request.headers)
  headers.set('content-security-policy', policy)
  return NextResponse.next({ request: { headers } })
}

/** Agents' routes are left out: thousands of reports a second need none of this. */
export const config = {
  matcher: ['/((?!_next/static|_next/image|api/agent/|favicon.ico).*)'],
}
