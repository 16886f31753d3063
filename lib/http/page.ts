import 'server-only'
import { headers } from 'next/headers'
import { notFound, redirect } from 'next/navigation'
import { cache } from 'react'
import { authenticate } from '@/lib/auth/authenticate'
import { ANYONE, type Caller, type UserCaller } from '@/lib/auth/caller'
import type { ActionName } from '@/lib/auth/permissions'
import type { Problem } from '@/lib/data/dto'
import { AppError } from './app-error'
import type { Call } from './call'
import { perform } from './perform'
import { toProblem } from './problem'
import { type RequestFacts, requestFacts } from './request-facts'
import { getRuntime } from './runtime'
import { assertStorable } from './storable'

const currentFacts = cache(async (): Promise<RequestFacts> => {
  return requestFacts(await headers(), 'GET', getRuntime())
})

/** Once per request, however many parts of the page ask. A renewed cookie cannot be set while rendering. */
const callerOfRequest = cache(async (): Promise<Caller> => {
  const runtime = getRuntime()
  const facts = await currentFacts()
  if (facts.sessionId === null) return ANYONE
  const em = await runtime.forkEm()
  const options = { mayRenew: false }
  return (await authenticate(em, { ...facts, bearer: null }, runtime.now(), options)).caller
})

/** The person looking at the page, for showing names and choices. Never the check: see `page`. */
export async function currentUser(): Promise<UserCaller | null> {
  const caller = await callerOfRequest()
  return caller.kind === 'user' ? caller : null
}

export type PageResult<T> = { ok: true; value: T } | { ok: false; problem: Problem }

/**
 * Reads what a page shows. Visitors are sent to sign in, what does not exist for the caller is "not found", and
 * a refusal comes back as a problem for the page to show. Other failures go to the page's error boundary.
 * `address` is what `run` takes from the page's path and search parameters.
 */
export async function page<T>(
  action: ActionName,
  run: (call: Call) => Promise<T>,
  address: unknown = null,
): Promise<PageResult<T>> {
  try {
    assertStorable(address)
    const facts = await currentFacts()
    const value = await perform(getRuntime(), { action, facts, authenticate: callerOfRequest, run })
    return { ok: true, value }
  } catch (error) {
    if (!(error instanceof AppError)) throw error
    if (error.code === 'not-signed-in') redirect('/sign-in')
    if (error.code === 'not-found' || error.code === 'invalid-input') notFound()
    return { ok: false, problem: toProblem(error) }
  }
}
