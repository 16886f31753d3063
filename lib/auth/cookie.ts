/** Kept apart from session.ts: the request filter looks for the cookie and must load nothing else. */
export const SESSION_COOKIE = 'thinspan_session'
/** The short name of the team that a person of several acts for. A wish: what they may do is checked all the same. */
export const ACTING_COOKIE = 'thinspan-acting'

export interface CookieToSet {
  name: string
  value: string
  options: {
    path: string
    httpOnly: boolean
    sameSite: 'lax'
    secure: boolean
    /** Whole seconds; 0 removes the cookie. */
    maxAge: number
  }
}

export function cookieHeader({ name, value, options }: CookieToSet): string {
  const parts = [
    `${name}=${value}`,
    `Path=${options.path}`,
    `Max-Age=${options.maxAge}`,
    'SameSite=Lax',
    'HttpOnly',
  ]
  if (options.secure) parts.push('Secure')
  return parts.join('; ')
}

export function readCookie(header: string | null, name: string): string | null {
  for (const part of header?.split(';') ?? []) {
    const split = part.indexOf('=')
    if (split > 0 && part.slice(0, split).trim() === name) return part.slice(split + 1).trim()
  }
  return null
}
