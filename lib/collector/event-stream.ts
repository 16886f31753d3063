import type { Clock } from './clock'
import type { FeedEvent } from './feed'

export const HEARTBEAT_MS = 15_000
/** Streams end after this long: the browser comes back by itself, and its rights are looked at again. */
export const STREAM_MOST_MS = 15 * 60_000
/** Milliseconds a browser waits before it comes back. */
const RETRY_MS = 2_000

export interface EventStreamComponents {
  clock: Clock
  /** Calls back for all that is new until the signal aborts. */
  listen(fn: (event: FeedEvent) => void, signal: AbortSignal): Promise<void>
  /** What is new: one message each. */
  load(event: FeedEvent): Promise<readonly object[]>
}

/**
 * Server-sent events (WHATWG HTML, "Server-sent events"), until one of `signals` aborts or the reader goes. Begins
 * with the present reading.
 */
export function eventStream(
  { clock, listen, load }: EventStreamComponents,
  signals: readonly AbortSignal[],
): Response {
  const encoder = new TextEncoder()
  const closing = new AbortController()
  const stream = new ReadableStream<Uint8Array>({
    start(controller) {
      const end = () => {
        if (closing.signal.aborted) return
        closing.abort()
        controller.close()
      }
      const say = (text: string) => {
        if (!closing.signal.aborted) controller.enqueue(encoder.encode(text))
      }
      const due = new Set<FeedEvent>()
      let saying = false
      let noticed = false
      /** One at a time: notices that come meanwhile are answered by one further look. */
      const sayDue = async () => {
        if (saying) return
        saying = true
        for (let next = takeFirst(due); next !== undefined; next = takeFirst(due)) {
          for (const value of await load(next)) say(`event: ${next}\ndata: ${JSON.stringify(value)}\n\n`)
        }
        saying = false
      }
      const beat = () => {
        say(': still here\n\n')
        // Whoever has stopped evaluating sends no notice of it: without any, the reading's age is looked at.
        if (!noticed) note('reading')
        noticed = false
        if (!closing.signal.aborted) cancelBeat = clock.after(HEARTBEAT_MS, beat)
      }
      let cancelBeat = clock.after(HEARTBEAT_MS, beat)
      const cancelEnd = clock.after(STREAM_MOST_MS, end)
      closing.signal.addEventListener('abort', () => {
        cancelBeat()
        cancelEnd()
        for (const signal of signals) signal.removeEventListener('abort', end)
      })
      say(`retry: ${RETRY_MS}\n\n`)
      if (signals.some(({ aborted }) => aborted)) return end()
      for (const signal of signals) signal.addEventListener('abort', end, { once: true })
      const note = (event: FeedEvent) => {
        due.add(event)
        // A look that fails ends the stream: the browser comes back and sees where things stand.
        sayDue().catch(end)
      }
      const hear = (event: FeedEvent) => {
        noticed ||= event === 'reading'
        note(event)
      }
      listen(hear, closing.signal).then(() => note('reading'), end)
    },
    cancel() {
      closing.abort()
    },
  })
  return new Response(stream, {
    headers: {
      'content-type': 'text/event-stream; charset=utf-8',
      'cache-control': 'no-cache, no-transform',
      'x-accel-buffering': 'no',
    },
  })
}

function takeFirst<T>(set: Set<T>): T | undefined {
  const [first] = set
  if (first !== undefined) set.delete(first)
  return first
}
