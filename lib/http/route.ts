import type { z } from 'zod'
import { authenticate } from '@/lib/auth/authenticate'
import type { Caller } from '@/lib/auth/caller'
import { type CookieToSet, cookieHeader } from '@/lib/auth/cookie'
import { type ActionName, permissionOf } from '@/lib/auth/permissions'
import type { EntityManager } from '@/lib/db'
import { AppError } from './app-error'
import { type Asked, askedOf, type PlainAnswer, responseOf } from './asked'
import { BODY_MAX_BYTES, readJson } from './body'
import type { Call } from './call'
import { perform } from './perform'
import { invalidInput, problemResponse } from './problem'
import { type RequestFacts, requestFacts } from './request-facts'
import { getRuntime } from './runtime'
import { assertStorable } from './storable'
import { BODY_ENCODING } from './unpack'

const NO_BYTES = new Uint8Array()

type Schema = z.ZodType | undefined
type Output<S extends Schema> = S extends z.ZodType ? z.output<S> : undefined

export interface RouteInput<P extends Schema, Q extends Schema, B extends Schema> {
  params: Output<P>
  query: Output<Q>
  body: Output<B>
  /** Empty unless the route takes its body raw. */
  bytes: Uint8Array
  request: Asked
  facts: RequestFacts
}

export interface RouteSpec<P extends Schema, Q extends Schema, B extends Schema> {
  params?: P
  /** Search parameters; of a repeated one the last. */
  query?: Q
  /** JSON body. */
  body?: B
  maxBytes?: number
  /** The body is taken as it comes, up to `maxBytes`, and before a transaction begins: it may be large and slow. */
  raw?: boolean
  /** Status of a plain result; default 200. */
  status?: number
  /** The call leaves its entity manager alone. */
  withoutManager?: boolean
  /** In place of cookie and bearer token: proves who calls from the parsed request, or throws an AppError. */
  authenticate?: (em: EntityManager, input: RouteInput<P, Q, B>, now: Date) => Promise<Caller>
}

/** What can be said of a route without calling it. */
export type DescribedSpec = Pick<
  RouteSpec<Schema, Schema, Schema>,
  'params' | 'query' | 'body' | 'raw' | 'status'
>

export interface RouteHandler {
  (request: Request, context: { params: Promise<unknown> }): Promise<Response>
  /** The row of the permission table; a test looks for it on every exported method. */
  permission: ActionName
  /** What it takes, for those who describe it. */
  spec: DescribedSpec
  /** The same for a server that has no web Request at hand, which would cost it more than the rest. */
  answer(asked: Asked, context: { params: Promise<unknown> }): Promise<Response | PlainAnswer>
}

/**
 * Wraps one method of a route handler. What `run` returns is sent as JSON, unless it is a Response (a stream,
 * a file), which is sent as it is.
 */
export function route<
  T,
  P extends Schema = undefined,
  Q extends Schema = undefined,
  B extends Schema = undefined,
>(
  action: ActionName,
  spec: RouteSpec<P, Q, B>,
  run: (call: Call, input: RouteInput<P, Q, B>) => Promise<T>,
): RouteHandler {
  const said = async (request: Asked, context: { params: Promise<unknown> }) => {
    try {
      const runtime = getRuntime()
      const facts = requestFacts(request.headers, request.method, runtime)
      let renewed: CookieToSet | null = null
      let input: RouteInput<P, Q, B> | undefined
      const parsed = async () => {
        input ??= await parse(spec, request, context, facts)
        return input
      }
      const value = await perform(runtime, {
        action,
        facts,
        withoutManager: spec.withoutManager,
        authenticate: async (em, now) => {
          if (spec.authenticate) return spec.authenticate(em, await parsed(), now)
          refuseForeign(action, facts)
          const result = await authenticate(em, facts, now, { mayRenew: true })
          renewed = result.renewed
          return result.caller
        },
        before: spec.raw
          ? async () => {
              await parsed()
            }
          : undefined,
        run: async (call) => run(call, await parsed()),
      })
      const answer = value instanceof Response ? value : json(value, spec.status ?? 200)
      if (!renewed) return answer
      const response = responseOf(answer)
      response.headers.append('set-cookie', cookieHeader(renewed))
      return response
    } catch (error) {
      return problemResponse(error)
    }
  }
  const answer: RouteHandler['answer'] = async (asked, context) => {
    const answered = await said(asked, context)
    if (!spec.body) return answered
    if (answered instanceof Response) answered.headers.set('accept-encoding', BODY_ENCODING)
    else answered.headers['accept-encoding'] = BODY_ENCODING
    return answered
  }
  const handler = async (request: Request, context: { params: Promise<unknown> }) =>
    responseOf(await answer(askedOf(request), context))
  return Object.assign(handler, { permission: action, spec, answer })
}

/** A page of another site can make a browser send our cookie, but not a header of its own. */
function refuseForeign(action: ActionName, facts: RequestFacts): void {
  const byCookie =
    facts.bearer === null && (facts.sessionId !== null || permissionOf(action).who === 'anyone')
  if (facts.unsafe && byCookie && facts.foreign)
    throw new AppError('wrong-origin', 'Send the request from a page of this server, or with a token.')
}

async function parse<P extends Schema, Q extends Schema, B extends Schema>(
  spec: RouteSpec<P, Q, B>,
  request: Asked,
  context: { params: Promise<unknown> },
  facts: RequestFacts,
): Promise<RouteInput<P, Q, B>> {
  const input = {
    params: spec.params && check(spec.params, storable(await context.params)),
    query: spec.query && check(spec.query, storable(Object.fromEntries(new URL(request.url).searchParams))),
    body: spec.body && check(spec.body, await readJson(request, spec.maxBytes)),
    bytes: spec.raw ? await request.bytes(spec.maxBytes ?? BODY_MAX_BYTES) : NO_BYTES,
    request,
    facts,
  }
  // Each part has just been through the schema that its type is taken from; a part without one is undefined.
  return input as RouteInput<P, Q, B>
}

function storable(value: unknown): unknown {
  assertStorable(value)
  return value
}

function check(schema: z.ZodType, value: unknown): unknown {
  const result = schema.safeParse(value)
  if (!result.success) throw invalidInput(result.error)
  return result.data
}

function json(value: unknown, status: number): PlainAnswer {
  if (value === undefined) return { status: 204, headers: {}, body: null }
  const headers = { 'content-type': 'application/json', 'cache-control': 'no-store' }
  return { status, headers, body: JSON.stringify(value) }
}
