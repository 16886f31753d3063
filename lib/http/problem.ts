import { DriverException } from '@mikro-orm/core'
import type { ZodError } from 'zod'
import type { Problem } from '@/lib/data/dto'
import { AppError, ERRORS } from './app-error'

export const PROBLEM_MEDIA_TYPE = 'application/problem+json'

/** RFC 9457. Types are names, not addresses: there is nothing to fetch behind them. */
export function toProblem(error: unknown): Problem & Record<string, unknown> {
  const known = asAppError(error)
  const { status, title, retry } = ERRORS[known.code]
  return {
    ...known.data.members,
    type: `urn:problem-type:thinspan:${known.code}`,
    title,
    status,
    detail: known.detail,
    code: known.code,
    retry,
    ...(known.data.errors ? { errors: known.data.errors } : {}),
  }
}

export function problemResponse(error: unknown): Response {
  const known = asAppError(error)
  const headers = new Headers({ 'content-type': PROBLEM_MEDIA_TYPE, 'cache-control': 'no-store' })
  if (known.data.retryAfterSeconds) headers.set('retry-after', String(known.data.retryAfterSeconds))
  if (ERRORS[known.code].status === 401) headers.set('www-authenticate', 'Bearer realm="thinspan"')
  return new Response(JSON.stringify(toProblem(known)), { status: ERRORS[known.code].status, headers })
}

/** What a user may see of an error. */
export function asAppError(error: unknown): AppError {
  if (error instanceof AppError) return error
  if (isConnectionError(error))
    return new AppError('unavailable', 'The database does not answer. Try again in a moment.', {
      retryAfterSeconds: 2,
    })
  return new AppError(
    'internal',
    'The request could not be carried out. Try again; if it happens again, look at the server log.',
  )
}

export function invalidInput(error: ZodError): AppError {
  const errors = error.issues.map((issue) => ({ path: issue.path.join('.'), message: issue.message }))
  const named = errors.map(({ path, message }) => (path ? `${path}: ${message}` : message)).join(' ')
  return new AppError('invalid-input', `Correct these and try again. ${named}`, { errors })
}

/** Class 08, 57P0x: connection lost or the server shutting down (PostgreSQL documentation, appendix A). */
function isConnectionError(error: unknown): boolean {
  if (!(error instanceof Error)) return false
  const code = 'code' in error && typeof error.code === 'string' ? error.code : ''
  if (/^(08|57P0)/.test(code) || ['ECONNREFUSED', 'ECONNRESET', 'ENOENT'].includes(code)) return true
  return error instanceof DriverException && error.name === 'ConnectionException'
}
