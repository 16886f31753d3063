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

/** What the driver says, without a code, when a connection ends under a statement or nothing is heard of it (pg 8.20, lib/client.js); knex puts the statement before it. */
const CONNECTION_ENDED =
  /(^| - )(Query read timeout|Connection terminated( unexpectedly| due to connection timeout)?|Client (has encountered a connection error|was closed) and is not queryable)$/

/**
 * Classes 08 and 53, 57P0x, 57014, 25P03: connection lost, no room for another, the server shutting down or starting up, a
 * statement given up on, a transaction ended because nothing came for too long (PostgreSQL documentation, appendix A); or
 * no connection was free.
 */
function isConnectionError(error: unknown): boolean {
  if (!(error instanceof Error)) return false
  const code = 'code' in error && typeof error.code === 'string' ? error.code : ''
  if (
    /^(08|53|57P0|57014|25P03)/.test(code) ||
    ['ECONNREFUSED', 'ECONNRESET', 'EPIPE', 'ENOENT'].includes(code)
  )
    return true
  if (CONNECTION_ENDED.test(error.message) || error.name === 'KnexTimeoutError') return true
  return error instanceof DriverException && error.name === 'ConnectionException'
}
