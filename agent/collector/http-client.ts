import type { z } from 'zod'
import { agentProblemSchema, enrolReplySchema, reportReplySchema, sessionReplySchema } from '@/lib/protocol'
import type { Clock } from '../clock'
import type { CollectorClient, CollectorResult } from './client'
import type { Post } from './post'

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
  const post = <T>(path: string, body: object, schema: z.ZodType<T>, signal: AbortSignal, token?: string) =>
    call(components, new URL(path, base), { body, schema, signal, token, timeoutMs })
  return {
    enrol: (request, signal) => post('api/agent/enrol', request, enrolReplySchema, signal),
    session: (request, signal) => post('api/agent/session', request, sessionReplySchema, signal),
    report: (report, token, signal) => post('api/agent/report', report, reportReplySchema, signal, token),
  }
}

interface Call<T> {
  body: object
  schema: z.ZodType<T>
  signal: AbortSignal
  token: string | undefined
  timeoutMs: number
}

async function call<T>(
  { post, clock }: HttpCollectorComponents,
  url: URL,
  init: Call<T>,
): Promise<CollectorResult<T>> {
  const abort = new AbortController()
  let timedOut = false
  const onAbort = () => abort.abort()
  const cancelTimeout = clock.after(init.timeoutMs, () => {
    timedOut = true
    abort.abort()
  })
  init.signal.addEventListener('abort', onAbort, { once: true })
  if (init.signal.aborted) abort.abort()
  const headers: Record<string, string> = { 'content-type': 'application/json', accept: 'application/json' }
  if (init.token !== undefined) headers.authorization = `Bearer ${init.token}`
  try {
    const reply = await post(url, {
      headers,
      body: JSON.stringify(init.body),
      signal: abort.signal,
      maxReplyBytes: MAX_REPLY_BYTES,
    })
    return judge(reply.status, reply.text, init.schema)
  } catch (error) {
    if (timedOut) return { ok: false, error: { code: 'timeout', timeoutMs: init.timeoutMs } }
    const reason = init.signal.aborted ? 'stopped' : error instanceof Error ? error.message : String(error)
    return { ok: false, error: { code: 'unreachable', reason } }
  } finally {
    cancelTimeout()
    init.signal.removeEventListener('abort', onAbort)
  }
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
