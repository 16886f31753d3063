import { expect, it } from 'vitest'
import { eventStream, HEARTBEAT_MS, STREAM_MOST_MS } from '@/lib/collector/event-stream'
import type { FeedEvent } from '@/lib/collector/feed'
import { FakeClock } from '@/tests/support/fake-clock'

function open() {
  const clock = new FakeClock()
  const stop = new AbortController()
  let tell: (event: FeedEvent) => void = () => {}
  let listening: AbortSignal | null = null
  let looks = 0
  const response = eventStream(
    {
      clock,
      listen: async (fn, signal) => {
        tell = fn
        listening = signal
      },
      load: async (event) => {
        looks += 1
        return event === 'reading' ? [{ look: looks }] : [{ id: 1 }, { id: 2 }]
      },
    },
    [stop.signal],
  )
  const reader = response.body!.getReader()
  const read = async () => {
    const { value, done } = await reader.read()
    return done ? null : new TextDecoder().decode(value)
  }
  return {
    clock,
    stop,
    response,
    reader,
    read,
    tell: (event: FeedEvent) => tell(event),
    ended: () => listening?.aborted,
  }
}

it('a stream begins with the present reading and says what is new, one message each', async () => {
  const { read, tell, response, stop } = open()
  expect(response.headers.get('content-type')).toContain('text/event-stream')
  expect(response.headers.get('cache-control')).toBe('no-cache, no-transform')
  expect(await read()).toBe('retry: 2000\n\n')
  expect(await read()).toBe('event: reading\ndata: {"look":1}\n\n')
  tell('event')
  expect([await read(), await read()]).toEqual([
    'event: event\ndata: {"id":1}\n\n',
    'event: event\ndata: {"id":2}\n\n',
  ])
  stop.abort()
  expect(await read()).toBeNull()
})

it('notices that come while it looks are answered by one further look', async () => {
  const { read, tell, stop } = open()
  await read()
  await read()
  tell('reading')
  tell('reading')
  tell('reading')
  expect(await read()).toBe('event: reading\ndata: {"look":2}\n\n')
  expect(await read()).toBe('event: reading\ndata: {"look":3}\n\n')
  stop.abort()
  expect(await read()).toBeNull()
})

it('a quiet stream says that it lives, and ends after a while so that rights are looked at again', async () => {
  const { read, clock, ended } = open()
  await read()
  await read()
  await clock.advance(HEARTBEAT_MS)
  expect(await read()).toBe(': still here\n\n')
  await clock.advance(STREAM_MOST_MS)
  let last: string | null = ''
  while (last !== null) last = await read()
  expect(ended()).toBe(true)
})

it('without notices of readings the present one is looked at now and then, as its age may tell', async () => {
  const { read, clock, tell, stop } = open()
  await read()
  await read()
  tell('reading')
  expect(await read()).toBe('event: reading\ndata: {"look":2}\n\n')
  await clock.advance(HEARTBEAT_MS)
  expect(await read()).toBe(': still here\n\n')
  await clock.advance(HEARTBEAT_MS)
  expect([await read(), await read()]).toEqual([': still here\n\n', 'event: reading\ndata: {"look":3}\n\n'])
  stop.abort()
  expect(await read()).toBeNull()
})

it('a reader that goes ends the listening', async () => {
  const { reader, ended } = open()
  await reader.read()
  await reader.cancel()
  expect(ended()).toBe(true)
})
