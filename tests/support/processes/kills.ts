import pg from 'pg'
import { afterAll, beforeAll, expect, it } from 'vitest'
import { sql } from '@/lib/db'
import { setRuntime } from '@/lib/http/runtime'
import { joinAgent, seedCode, seedOverlay } from '../collector'
import { createTestDatabase, type TestDatabase } from '../database'
import { seedTeam, testRuntime } from '../people'
import { until } from '../until'
import { CollectorProcess } from './collector-process'
import { expectKept } from './kept'
import { OwnCluster } from './own-cluster'
import { Reporters } from './reporters'

export interface KillsInit {
  agents: number
  /** How often the collector is killed, and then the database. */
  times: number
}

/** The collector and the database killed with reports under way: what was answered is there, once. */
export function killTests({ agents, times }: KillsInit): void {
  // Each begins programs and a database anew, beside other tests.
  const patienceMs = 300_000 + 60_000 * times
  const cluster = new OwnCluster()
  let database: TestDatabase
  let collector: CollectorProcess
  let reporters: Reporters
  let overlayId: string

  beforeAll(async () => {
    database = await createTestDatabase(await cluster.start())
    setRuntime(testRuntime(database, () => new Date()))
    const { teamId } = await seedTeam(database.orm.em.fork(), 'harbourline', ['owner'], new Date())
    overlayId = (await seedOverlay(database, teamId, { slug: 'tides', pace: 'steady' })).id
    const code = await seedCode(database, overlayId, { uses: agents })
    collector = new CollectorProcess(database.url)
    const members = []
    for (let index = 0; index < agents; index++) members.push(await joinAgent(code, `tar-${index}`))
    await collector.start()
    reporters = new Reporters(members, { url: collector.url })
    reporters.start()
  }, patienceMs)
  afterAll(async () => {
    await reporters?.stop()
    await collector?.child.stop()
    setRuntime(undefined)
    await database?.close().catch(() => undefined)
    await cluster.stop()
  })

  const kept = () => expectKept(database.orm.em.fork(), reporters.states)

  /** Until a report of each agent is stored that nobody has answered: replies are made from what is locked here. */
  async function allStoredAndUnanswered(act: () => Promise<void>): Promise<void> {
    const client = new pg.Client({ connectionString: database.url })
    await client.connect()
    await client.query('begin; lock table controls in access exclusive mode')
    const isAhead = async () => {
      const rows = await sql<{ id: string; number: string }>(
        database.orm.em.fork(),
        'select agent_id as id, report_number as number from agent_states',
      )
      const held = new Map(rows.map(({ id, number }) => [id, Number(number)]))
      return reporters.states.every(({ member, answered }) => (held.get(member.agentId) ?? 0) > answered)
    }
    await until(isAhead)
    await act()
    await client.query('rollback')
    await client.end()
  }

  it(
    'a collector that is killed before it answers what it has stored costs nothing, and retries count once',
    async () => {
      for (let time = 0; time < times; time++) {
        await reporters.answers(5)
        const before = reporters.repeated
        await allStoredAndUnanswered(async () => {
          // All at once, or the one that leads, with which the others end.
          if (time % 2 === 0) collector.child.signalGroup('SIGKILL')
          else collector.child.signal('SIGKILL')
          await collector.child.end
        })
        collector = await new CollectorProcess(database.url).start()
        reporters.url = collector.url
        await reporters.answers(2)
        expect(reporters.repeated).toBeGreaterThan(before)
        await kept()
      }
      // A machine that is slow enough lets a statement wait for the lock until it is given up on.
      expect(reporters.refusals.filter(({ status }) => status !== 503)).toEqual([])
    },
    patienceMs,
  )

  it(
    'a database that goes down at once loses nothing that was answered; the collector says so and comes back by itself',
    async () => {
      const sequence = async () =>
        Number(
          (
            await sql<{ sequence: string }>(
              database.orm.em.fork(),
              'select sequence from controls where overlay_id = ?',
              [overlayId],
            )
          )[0]?.sequence,
        )
      for (let time = 0; time < times; time++) {
        await reporters.answers(5)
        const before = await sequence()
        const refused = reporters.refusals.length
        await cluster.crash()
        await reporters.until(() => reporters.refusals.length >= refused + 2 * agents)
        await cluster.start()
        await reporters.answers(5)
        await kept()
        await until(async () => (await sequence()) >= before + 2)
      }
      const said = reporters.refusals.map(({ status, retryAfter, code }) => `${status} ${retryAfter} ${code}`)
      expect(
        [...new Set(said)],
        collector.child.lines.filter((line) => line.includes('"level":50')).join('\n'),
      ).toEqual(['503 2 unavailable'])
      expect(collector.child.ended).toBeNull()
    },
    patienceMs,
  )
}
