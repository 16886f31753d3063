import { once } from 'node:events'
import { createServer, type Server } from 'node:http'
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest'
import { query } from '@/lib/collector/query'
import { Heartbeat, readPulses } from '@/lib/warn/heartbeat'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { FakeClock } from '@/tests/support/fake-clock'
import { eventually } from '@/tests/support/until'

const SIGNAL = new AbortController().signal
let database: TestDatabase
let server: Server
let url: string
let answer: number | null
let called: string[]
let said: string[]
let clock: FakeClock

beforeAll(async () => {
  database = await createTestDatabase()
  server = createServer((request, response) => {
    called.push(`${request.method} ${request.url}`)
    if (answer !== null) response.writeHead(answer, { location: '/elsewhere' }).end()
  }).listen(0, '127.0.0.1')
  await once(server, 'listening')
  const address = server.address()
  url = `http://127.0.0.1:${typeof address === 'object' ? address?.port : ''}/beat`
})
afterAll(async () => {
  server.closeAllConnections()
  server.close()
  await database.close()
})
beforeEach(async () => {
  answer = 200
  called = []
  said = []
  clock = new FakeClock({ epochMs: Date.parse('2026-12-02T04:00:00Z') })
  await query(database.orm.em.fork(), 'delete from watch_pulses')
})

const pulse = (what: string, agoMs: number) =>
  query(database.orm.em.fork(), 'insert into watch_pulses values (?, ?)', [
    what,
    new Date(clock.epochMs() - agoMs),
  ])
const beat = (signal = SIGNAL) =>
  new Heartbeat(
    {
      forkEm: async () => database.orm.em.fork(),
      now: () => new Date(clock.epochMs()),
      clock,
      log: { info: () => {}, warn: (_data, message) => said.push(message), error: () => {} },
      fetch,
    },
    { url },
  ).beat(signal)

describe('the heartbeat', () => {
  it.each<[string, number | null, number | null, boolean]>([
    ['is sent while evaluating and sending live', 0, 90_000, true],
    ['is not sent once sending is silent', 0, 90_001, false],
    ['is not sent once evaluating is silent', 90_001, 0, false],
    ['is not sent before either has lived', null, null, false],
  ])('%s', async (_, evaluatingMs, sendingMs, isSent) => {
    if (evaluatingMs !== null) await pulse('evaluating', evaluatingMs)
    if (sendingMs !== null) await pulse('sending', sendingMs)
    expect([await beat(), called]).toEqual([isSent, isSent ? ['GET /beat'] : []])
    const { heartbeatMs } = await readPulses(database.orm.em.fork())
    expect(heartbeatMs).toBe(isSent ? clock.epochMs() : null)
    expect(said).toEqual(isSent ? [] : ['no heartbeat: evaluating or sending stands still'])
  })

  it.each([302, 500])('follows nothing, and says that it was not taken: %s', async (status) => {
    await pulse('evaluating', 0)
    await pulse('sending', 0)
    answer = status
    expect([await beat(), called, said]).toEqual([false, ['GET /beat'], ['the heartbeat was not taken']])
  })

  it('ends where it is stopped while the address does not answer', async () => {
    await pulse('evaluating', 0)
    await pulse('sending', 0)
    answer = null
    const stopping = new AbortController()
    const beating = beat(stopping.signal)
    await eventually(async () => expect(called).toEqual(['GET /beat']))
    stopping.abort()
    expect([await beating, said]).toEqual([false, []])
  })
})
