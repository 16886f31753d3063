import type { z } from 'zod'
import {
  agentProblemSchema,
  directorySchema,
  enrolReplySchema,
  keyChangeReplySchema,
  leaveReplySchema,
  reportReplySchema,
  sessionReplySchema,
} from '@/lib/protocol'
import type { Clock } from '../clock'
import { type Body, BodyPacking } from './body-packing'
import type { CollectorClient, CollectorResult, DirectoryReply } from './client'
import type { Post, PostReply } from './post'

export const COLLECTOR_TIMEOUT_MS = 10_000
export const MAX_REPLY_BYTES = 2 * 1024 * 1024

export interface HttpCollectorComponents {
  post: Post
  clock: Clock
}

export interface HttpCollectorInit {
  /** Base address, e.g. https://thinspan.harbourline.example */
  baseUrl: string
  timeoutMs?: number
}

/** @throws TypeError where the base address is none */
export function createHttpCollector(
  components: HttpCollectorComponents,
  { baseUrl, timeoutMs = COLLECTOR_TIMEOUT_MS }: HttpCollectorInit,
): CollectorClient {
  const base = new URL(baseUrl.endsWith('/') ? baseUrl : `${baseUrl}/`)
  const packing = new BodyPacking()
  const post = async <T>(
    path: string,
    body: object,
    schema: z.ZodType<T>,
    signal: AbortSignal,
    token?: string,
  ): Promise<CollectorResult<T>> => {
    const reply = await call(components, new URL(path, base), { body, signal, token, timeoutMs, packing })
    return reply.ok ? judge(reply.value.status, reply.value.text, schema) : reply
  }
  return {
    enrol: (request, signal) => post('api/agent/enrol', request, enrolReplySchema, signal),
    session: (request, signal) => post('api/agent/session', request, sessionReplySchema, signal),
    report: (request, token, signal) => post('api/agent/report', request, reportReplySchema, signal, token),
    key: (request, signal) => post('api/agent/key', request, keyChangeReplySchema, signal),
    leave: (request, token, signal) => post('api/agent/leave', request, leaveReplySchema, signal, token),
    directory: async (etag, token, signal) => {
      const url = new URL('api/agent/directory', base)
      const reply = await call(components, url, { body: null, signal, token, timeoutMs, etag, packing })
      return reply.ok ? judgeDirectory(reply.value, etag) : reply
    },
  }
}

interface Call {
  /** Null to ask instead of to say. */
  body: object | null
  signal: AbortSignal
  token: string | undefined
  timeoutMs: number
  etag?: string | null
  packing: BodyPacking
}

async function call(
  { post, clock }: HttpCollectorComponents,
  url: URL,
  init: Call,
): Promise<CollectorResult<PostReply>> {
  const abort = new AbortController()
  let timedOut = false
  const onAbort = () => abort.abort()
  const cancelTimeout = clock.after(init.timeoutMs, () => {
    timedOut = true
    abort.abort()
  })
  init.signal.addEventListener('abort', onAbort, { once: true })
  if (init.signal.aborted) abort.abort()
  try {
    const send = (body: Body) =>
      post(url, {
        method: init.body === null ? 'GET' : 'POST',
        headers: headersOf(init, body),
        body: body.content,
        signal: abort.signal,
        maxReplyBytes: MAX_REPLY_BYTES,
      })
    const text = init.body === null ? '' : JSON.stringify(init.body)
    const body = init.packing.pack(text)
    const value = await send(body)
    if (!init.packing.note(body, value)) return { ok: true, value }
    return { ok: true, value: await send({ content: text, isPacked: false }) }
  } catch (error) {
    if (timedOut) return { ok: false, error: { code: 'timeout', timeoutMs: init.timeoutMs } }
    const reason = init.signal.aborted ? 'stopped' : error instanceof Error ? error.message : String(error)
    return { ok: false, error: { code: 'unreachable', reason } }
  } finally {
    cancelTimeout()
    init.signal.removeEventListener('abort', onAbort)
  }
}

function headersOf({ body, token, etag }: Call, { isPacked }: Body): Record<string, string> {
  return {
    accept: 'application/json',
    ...(body === null ? {} : { 'content-type': 'application/json' }),
    ...(isPacked ? { 'content-encoding': 'gzip' } : {}),
    ...(token === undefined ? {} : { authorization: `Bearer ${token}` }),
    ...(etag === null || etag === undefined ? {} : { 'if-none-match': etag }),
  }
}

function judgeDirectory(reply: PostReply, asked: string | null): CollectorResult<DirectoryReply> {
  if (reply.status === 304 && asked !== null) return { ok: true, value: { etag: asked, directory: null } }
  const judged = judge(reply.status, reply.text, directorySchema)
  return judged.ok ? { ok: true, value: { etag: reply.etag ?? null, directory: judged.value } } : judged
}

function judge<T>(status: number, text: string | null, schema: z.ZodType<T>): CollectorResult<T> {
  const bad = (issue: string): CollectorResult<T> => ({
    ok: false,
    error: { code: 'bad-reply', status, issue },
  })
  if (text === null) return bad(`more than ${MAX_REPLY_BYTES} bytes`)
  let json: unknown
  try {
    json = JSON.parse(text)
  } catch {
    return bad('not JSON')
  }
  if (status < 200 || status > 299) {
    const problem = agentProblemSchema.safeParse(json)
    return problem.success
      ? { ok: false, error: { code: 'refused', problem: problem.data } }
      : bad('an error without problem details')
  }
  const parsed = schema.safeParse(json)
  if (parsed.success) return { ok: true, value: parsed.data }
  const issue = parsed.error.issues[0]
  return bad(issue ? `${issue.path.join('.')}: ${issue.message}` : 'not the expected shape')
}
