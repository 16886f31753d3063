import type { Clock } from '../clock'
import type { Post } from '../collector/post'
import { itemsOf } from './items'
import type { PathStep } from './path-expression'
import type { NodeItem, ReadList, ReadResult } from './source'

export const HTTP_TIMEOUT_MS = 5_000
export const MAX_BODY_BYTES = 1024 * 1024

/** Asks the node itself; one that says an ETag is asked whether it has changed (RFC 9110 §13.1.2). */
export function httpReader(
  { post, clock }: { post: Post; clock: Clock },
  { url, steps }: { url: string; steps: readonly PathStep[] | null },
): ReadList {
  let last: { etag: string; items: NodeItem[] } | null = null
  return async (signal) => {
    const abort = new AbortController()
    let timedOut = false
    const cancel = clock.after(HTTP_TIMEOUT_MS, () => {
      timedOut = true
      abort.abort()
    })
    const onAbort = () => abort.abort()
    signal.addEventListener('abort', onAbort, { once: true })
    try {
      const reply = await post(new URL(url), {
        method: 'GET',
        headers: { accept: 'application/json', ...(last ? { 'if-none-match': last.etag } : {}) },
        body: '',
        signal: abort.signal,
        maxReplyBytes: MAX_BODY_BYTES,
      })
      if (reply.status === 304 && last) return { ok: true, items: last.items }
      const result = judge(reply.status, reply.text, steps)
      last = result.ok && reply.etag ? { etag: reply.etag, items: result.items } : null
      return result
    } catch (error) {
      if (timedOut) return { ok: false, reason: `no answer within ${HTTP_TIMEOUT_MS} ms` }
      return { ok: false, reason: error instanceof Error ? error.message : String(error) }
    } finally {
      cancel()
      signal.removeEventListener('abort', onAbort)
    }
  }
}

function judge(status: number, text: string | null, steps: readonly PathStep[] | null): ReadResult {
  if (status !== 200) return { ok: false, reason: `status ${status}` }
  if (text === null) return { ok: false, reason: `more than ${MAX_BODY_BYTES} bytes` }
  try {
    return itemsOf(JSON.parse(text), steps)
  } catch {
    return { ok: false, reason: 'not JSON' }
  }
}
