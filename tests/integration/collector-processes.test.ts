import { once } from 'node:events'
import { connect, createServer } from 'node:net'
import pg from 'pg'
import { afterAll, beforeAll, expect, it } from 'vitest'
import { setRuntime } from '@/lib/http/runtime'
import { identify, isAlive } from '@/scripts/lib/processes.mjs'
import { joinAgent, type Member, seedCode, seedOverlay } from '../support/collector'
import { createTestDatabase, type TestDatabase } from '../support/database'
import { seedTeam, testRuntime } from '../support/people'
import { CollectorProcess } from '../support/processes/collector-process'
import { expectKept } from '../support/processes/kept'
import { postReport } from '../support/processes/report-client'
import { Reporters } from '../support/processes/reporters'
import { someReport } from '../support/reports'
import { until } from '../support/until'

const AGENTS = 8
const PATIENCE_MS = 60_000

let database: TestDatabase
let members: Member[]
let collector: CollectorProcess
let reporters: Reporters

beforeAll(async () => {
  database = await createTestDatabase()
  setRuntime(testRuntime(database, () => new Date()))
  const { teamId } = await seedTeam(database.orm.em.fork(), 'harbourline', ['owner'], new Date())
  const overlay = await seedOverlay(database, teamId, { slug: 'tides', pace: 'steady' })
  const code = await seedCode(database, overlay.id, { uses: AGENTS + 1 })
  collector = new CollectorProcess(database.url)
  members = []
  for (let index = 0; index <= AGENTS; index++) members.push(await joinAgent(code, `tar-${index}`))
  await collector.start()
  reporters = new Reporters(members.slice(1), { url: collector.url })
  reporters.start()
})
afterAll(async () => {
  await reporters?.stop()
  await collector?.child.stop()
  setRuntime(undefined)
  await database?.close()
})

function isRefused(url: string): Promise<boolean> {
  const { hostname, port } = new URL(url)
  return new Promise((settle) => {
    const socket = connect(Number(port), hostname, () => {
      socket.destroy()
      settle(false)
    })
    socket.once('error', (error) => settle('code' in error && error.code === 'ECONNREFUSED'))
  })
}

const kept = () => expectKept(database.orm.em.fork(), reporters.states)

it('one that is killed has another in its place while the others go on, and nothing that was answered is lost', async () => {
  await reporters.answers(3)
  const before = collector.intakes
  expect(before).toHaveLength(2)
  const said = collector.child.nextLine((line) => line.includes('has ended: starting another'))
  process.kill(before[0] ?? 0, 'SIGKILL')
  expect(JSON.parse(await said)).toMatchObject({ process: before[0], how: 'SIGKILL' })
  await reporters.answers(3)
  await until(() => collector.intakes.filter((pid) => !before.includes(pid)).length === 1)
  expect(collector.intakes).toContain(before[1])
  // Then nobody answers but those that came later.
  process.kill(before[1] ?? 0, 'SIGKILL')
  await reporters.answers(3)
  await until(() => collector.intakes.length === 2)
  await kept()
})

it('told to end, it answers what it has taken in, and leaves no process behind', async () => {
  const [member] = members
  if (!member) throw new Error('Nobody has joined.')
  await reporters.stop()
  const all = collector.intakes.map((pid) => identify(pid))
  const client = new pg.Client({ connectionString: database.url })
  await client.connect()
  // Replies are made from what is locked here, so that the report is stored and waits.
  await client.query('begin; lock table controls in access exclusive mode')
  const answer = postReport(collector.url, member.token, someReport(1), AbortSignal.timeout(PATIENCE_MS))
  await until(async () => {
    const { rows } = await client.query('select 1 from agent_states where agent_id = $1', [member.agentId])
    return rows.length > 0
  })
  // As whoever supervises it may tell all its processes at once, and someone tell it again.
  collector.child.signalGroup('SIGTERM')
  await until(() => isRefused(collector.url))
  collector.child.signalGroup('SIGTERM')
  await client.query('rollback')
  await client.end()
  expect(await answer).toMatchObject({ status: 200 })
  expect(await collector.child.end).toBe('ended with code 0')
  expect(all.filter((identity) => identity && isAlive(identity))).toEqual([])
})

it('those that take reports in end with the one that leads', async () => {
  collector = await new CollectorProcess(database.url).start()
  const all = collector.intakes.map((pid) => identify(pid))
  expect(all).toHaveLength(2)
  collector.child.signal('SIGKILL')
  await until(() => all.every((identity) => !identity || !isAlive(identity)))
  expect(await collector.child.end).toBe('ended with SIGKILL')
})

it('a port that is taken is said, with what to do', async () => {
  const other = createServer().listen(0, '127.0.0.1')
  await once(other, 'listening')
  const address = other.address()
  const port = typeof address === 'object' && address ? address.port : 0
  const wrong = new CollectorProcess(database.url, { PORT: String(port) })
  expect(await wrong.child.end).toBe('ended with code 1')
  expect(wrong.child.tail()).toBe(
    `Port ${port} on 127.0.0.1 cannot be listened on (in use or not allowed): stop what uses it, or choose another with PORT=${port + 1} npm run collector.`,
  )
  other.close()
})

it('a number of processes that is none is said', async () => {
  const wrong = new CollectorProcess(database.url, { INGEST_PROCESSES: 'all' })
  expect(await wrong.child.end).toBe('ended with code 1')
  expect(wrong.child.tail()).toBe(
    'Set INGEST_PROCESSES to how many processes take reports in, 1 to 99; "all" is no such number.',
  )
})

it('told to end while it starts, it ends and has nothing to complain of', async () => {
  const early = new CollectorProcess(database.url)
  await until(() => early.intakes.length > 0)
  early.child.signalGroup('SIGTERM')
  expect(await early.child.end).toBe('ended with code 0')
  expect(early.child.tail()).toBe('')
})

it('a host that is none of this machine is said', async () => {
  const wrong = new CollectorProcess(database.url, { PORT: '4100', HOST: '192.0.2.1' })
  expect(await wrong.child.end).toBe('ended with code 1')
  expect(wrong.child.tail()).toBe(
    'HOST is "192.0.2.1", which is no address of this machine (EADDRNOTAVAIL): give one that it has, or 0.0.0.0 for all.',
  )
})
