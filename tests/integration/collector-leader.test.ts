import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest'
import { type Control, ControlSchema, OverlayEventSchema, ReadingSchema } from '@/entities'
import { ExactCheck } from '@/lib/collector/exact'
import { LeaderStore } from '@/lib/collector/leader-store'
import { Moments } from '@/lib/collector/moments'
import { PlannedLinks } from '@/lib/collector/planned'
import { systemClock } from '@/lib/collector/process'
import { Term } from '@/lib/collector/term'
import { Upkeep } from '@/lib/collector/upkeep'
import { Usual } from '@/lib/collector/usual'
import { Listener, sql } from '@/lib/db'
import { setRuntime } from '@/lib/http/runtime'
import { rollUpAgain } from '@/lib/jobs'
import { createRandom } from '@/lib/method/random'
import { deliver, joinAgent, seedCode, seedOverlay } from '@/tests/support/collector'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { startTestLeader, type TestLeader } from '@/tests/support/leaders'
import { seedTeam, testRuntime } from '@/tests/support/people'
import { someReport } from '@/tests/support/reports'
import { Bell } from '@/tests/support/until'

let database: TestDatabase
let listener: Listener
let teamId: string
let count = 0
const leaders: TestLeader[] = []
const log = { info: () => {}, warn: () => {}, error: () => {} }
const forkEm = async () => database.orm.em.fork()

beforeAll(async () => {
  database = await createTestDatabase()
  listener = new Listener({ random: Math.random, warn: () => {} }, { url: database.url })
  listener.start()
  setRuntime(testRuntime(database, () => new Date()))
  teamId = (await seedTeam(database.orm.em.fork(), 'harbourline', ['owner'], new Date())).teamId
})
afterEach(async () => {
  await Promise.all(leaders.splice(0).map((leader) => leader.stop()))
})
afterAll(async () => {
  await listener.stop()
  setRuntime(undefined)
  await database.close()
})

const start = (seed: number): TestLeader => {
  const leader = startTestLeader(database, seed)
  leaders.push(leader)
  return leader
}

async function overlayWithAgent() {
  const overlay = await seedOverlay(database, teamId, { slug: `tides-${count++}` })
  const member = await joinAgent(await seedCode(database, overlay.id), 'tar-01')
  return { overlay, member }
}

const controlOf = (overlayId: string) => database.orm.em.fork().findOneOrFail(ControlSchema, overlayId)

/** Waits, notice by notice, until the control row is as wanted. */
async function until(overlayId: string, wanted: (control: Control) => boolean): Promise<Control> {
  const stop = new AbortController()
  const bell = new Bell()
  await listener.subscribe(`overlay:${overlayId}`, () => bell.ring(), stop.signal)
  const found: Control[] = []
  const isAsWanted = async () => {
    const control = await database.orm.em.fork().findOne(ControlSchema, overlayId)
    if (control) found.push(control)
    return control !== null && wanted(control)
  }
  const explain = () => `${wanted}\n${JSON.stringify(found.at(-1))}`
  await bell.until(isAsWanted, { explain }).finally(() => stop.abort())
  return found.at(-1)!
}

const termOf = (overlayId: string, store: Pick<LeaderStore, 'claim' | 'load' | 'write'>) =>
  new Term(
    {
      store,
      usual: new Usual({ forkEm, clock: systemClock, log }, { overlayId }),
      upkeep: new Upkeep({ forkEm, clock: systemClock }, { overlayId, holder: 'one' }),
      moments: new Moments({ forkEm }, { overlayId, holder: 'one' }),
      planned: new PlannedLinks({ forkEm }, { overlayId, holder: 'one' }),
      exact: new ExactCheck({ reckon: () => Promise.reject(new Error('not asked for')) }),
      clock: systemClock,
      random: createRandom(3),
      log,
    },
    { overlayId },
  )

describe('a leader', () => {
  it('takes up an overlay when its first agent joins, and leaves one without agents alone', async () => {
    const first = start(1)
    await seedOverlay(database, teamId, { slug: 'nobody-home' })
    const { overlay, member } = await overlayWithAgent()
    const control = await until(overlay.id, ({ sequence }) => sequence >= 2)
    expect(first.leader.led.map(({ overlayId }) => overlayId)).toEqual([overlay.id])
    expect(JSON.parse(control.ordersText!)).toMatchObject({
      sequence: control.sequence,
      linkTimePerSecond: 0,
      disclosure: 'named',
    })
    const { orders } = await deliver(member, someReport(1))
    expect(orders?.sequence).toBeGreaterThanOrEqual(control.sequence)
    await database.orm.em.fork().getKnex().raw(`update agents set state = 'left'`)
    await first.leads(0)
    expect(first.failures).toEqual([])
  })

  it('is one of two, and the other goes on from where it stopped', async () => {
    const [first, second] = [start(1), start(2)]
    const { overlay } = await overlayWithAgent()
    const before = await until(overlay.id, ({ sequence }) => sequence >= 3)
    expect(first.leader.led.length + second.leader.led.length).toBe(1)
    const [leading, waiting] = first.leader.led.length === 1 ? [first, second] : [second, first]
    await leading.stop()
    const stopped = await controlOf(overlay.id)
    const after = await until(overlay.id, ({ sequence }) => sequence >= stopped.sequence + 2)
    expect(waiting.leader.led).toHaveLength(1)
    expect(after.holder).not.toBe(before.holder)
    expect([...first.failures, ...second.failures]).toEqual([])
    await database.orm.em.fork().getKnex().raw(`update agents set state = 'left'`)
  })

  it('that was stopped and goes on cannot write: the overlay has another', async () => {
    const { overlay } = await overlayWithAgent()
    const old = new LeaderStore({ forkEm }, { overlayId: overlay.id, holder: 'old' })
    let letGo = () => {}
    const gate = new Promise<void>((resolve) => {
      letGo = resolve
    })
    let loads = 0
    let stuck = () => {}
    const isStuck = new Promise<void>((resolve) => {
      stuck = resolve
    })
    const held = {
      claim: () => old.claim(),
      write: (round: Parameters<LeaderStore['write']>[0]) => old.write(round),
      load: async () => {
        const loaded = await old.load()
        loads += 1
        // As if the process had been stopped between reading and writing.
        if (loads === 2) {
          stuck()
          await gate
        }
        return loaded
      },
    }
    const running = termOf(overlay.id, held).run(new AbortController().signal)
    await isStuck
    const stop = new AbortController()
    const next = new LeaderStore({ forkEm }, { overlayId: overlay.id, holder: 'new' })
    const successor = termOf(overlay.id, next).run(stop.signal)
    await until(overlay.id, ({ holder, sequence }) => holder === 'new' && sequence >= 3)
    stop.abort()
    expect(await successor).toBe('stopped')
    const before = await controlOf(overlay.id)
    const rows = () => database.orm.em.fork().find(ReadingSchema, { overlayId: overlay.id })
    const readings = await rows()
    letGo()
    expect(await running).toBe('replaced')
    expect(await controlOf(overlay.id)).toEqual(before)
    expect(await rows()).toEqual(readings)
  })

  it('whose sequence is not the next one writes nothing, not even an event', async () => {
    const { overlay } = await overlayWithAgent()
    const store = new LeaderStore({ forkEm }, { overlayId: overlay.id, holder: 'one' })
    await store.claim()
    let round: Parameters<LeaderStore['write']>[0] | undefined
    const stop = new AbortController()
    const capture = {
      claim: () => store.claim(),
      load: () => store.load(),
      write: async (made: typeof round & object) => {
        round = made
        stop.abort()
        return true
      },
    }
    await termOf(overlay.id, capture).run(stop.signal)
    const events = [{ kind: 'withheld' as const, text: 'Reading withheld' }]
    expect(await store.write({ ...round!, events, sequence: 5 })).toBe(false)
    const em = database.orm.em.fork()
    expect(await em.count(OverlayEventSchema, { overlayId: overlay.id, kind: 'withheld' })).toBe(0)
    expect(await em.count(ReadingSchema, { overlayId: overlay.id })).toBe(0)
    expect(await store.write({ ...round!, events, sequence: 1 })).toBe(true)
    expect(await em.count(OverlayEventSchema, { overlayId: overlay.id, kind: 'withheld' })).toBe(1)
    expect(await em.count(ReadingSchema, { overlayId: overlay.id })).toBe(1)
  })

  it('tries a failed round anew and gives up after five in a row', async () => {
    const { overlay } = await overlayWithAgent()
    const store = new LeaderStore({ forkEm }, { overlayId: overlay.id, holder: 'one' })
    let tries = 0
    const failing = {
      claim: () => store.claim(),
      load: () => store.load(),
      write: async () => {
        tries += 1
        throw new Error('no database')
      },
    }
    expect(await termOf(overlay.id, failing).run(new AbortController().signal)).toBe('failing')
    expect(tries).toBe(5)
  })
})

it('the usual comes from seven days of readings, and later hours are added', async () => {
  const overlay = await seedOverlay(database, teamId, { slug: `tides-${count++}` })
  const nowMs = Date.UTC(2026, 11, 20, 12, 30)
  const hourMs = 3_600_000
  await database.orm.em
    .fork()
    .getKnex()
    .raw(
      `insert into readings (overlay_id, at, lambda2, data, verdict, detail, body)
     select ?, ?::timestamptz - n * interval '30 minutes', case when n % 2 = 0 then 0.6 else 0.8 end,
       case when n % 5 = 0 then 'settling' else 'fresh' end, '', '', '{}' from generate_series(1, 24 * 2 * 8) n`,
      [overlay.id, new Date(nowMs)],
    )
  const rolledUp = (fromMs: number) =>
    rollUpAgain(database.orm.em.fork(), { fromMs, toMs: nowMs }, overlay.id)
  await rolledUp(nowMs - 9 * 24 * hourMs)
  let monotonicMs = 0
  const clock = { ...systemClock, monotonicMs: () => monotonicMs }
  const looked = async (usual: Usual) => {
    usual.at(nowMs)
    await usual.settled()
    return usual.at(nowMs)
  }
  const usual = new Usual({ forkEm, clock, log }, { overlayId: overlay.id })
  expect(usual.at(nowMs)).toBeUndefined()
  expect(await looked(usual)).toBeCloseTo(0.7)
  const drop = (table: string) =>
    sql(database.orm.em.fork(), `delete from ${table} where overlay_id = ? and at < ?`, [
      overlay.id,
      new Date(nowMs - hourMs),
    ])
  // Readings go after two weeks; what is usual looks back for a month.
  await drop('readings')
  monotonicMs += 10 * 60_000
  expect(await looked(usual)).toBeCloseTo(0.7)
  const other = () => new Usual({ forkEm, clock, log }, { overlayId: overlay.id })
  expect(await looked(other())).toBeCloseTo(0.7)
  await drop('reading_hours')
  expect(await looked(other())).toBeNull()
})
