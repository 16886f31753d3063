import { afterAll, beforeAll, expect, test } from 'vitest'
import { AgentSchema, AuditEntrySchema, OverlaySchema, UserSchema } from '@/entities'
import { verifyPassword } from '@/lib/auth/password'
import { Usual } from '@/lib/collector/usual'
import { sql } from '@/lib/db'
import { generateKeys } from '@/lib/protocol'
import { layOutHistory } from '@/scripts/demo/history'
import { hasReadings, storeHistory } from '@/scripts/demo/history-store'
import { PEOPLE, TEAM } from '@/scripts/demo/people'
import { PHASES, type Phase, type Sample } from '@/scripts/demo/phases'
import { type SeedInit, seedDemo } from '@/scripts/demo/seed'
import { harbourline } from '@/scripts/demo/topology'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { FakeClock } from '@/tests/support/fake-clock'
import { testRuntime } from '@/tests/support/people'

const NOW = new Date()
const names = harbourline().nodes.map(({ name }) => name)
let database: TestDatabase
let init: SeedInit

beforeAll(async () => {
  database = await createTestDatabase()
  init = {
    passwords: Object.fromEntries(PEOPLE.map(({ email }, index) => [email, `tide-berth-quay-${index}`])),
    passwordsAreNew: true,
    joiningCode: null,
    publicKeys: new Map(names.map((name) => [name, generateKeys().publicKey])),
  }
})
afterAll(() => database?.close())

const seed = (over: Partial<SeedInit> = {}, now = NOW) =>
  seedDemo(
    testRuntime(database, () => now),
    { ...init, ...over },
  )

async function join(overlayId: string, keys: ReadonlyMap<string, string>): Promise<void> {
  const em = database.orm.em.fork()
  for (const [name, publicKey] of keys)
    em.create(AgentSchema, {
      overlay: em.getReference(OverlaySchema, overlayId),
      name,
      publicKey,
      labels: {},
      version: 'test',
      joinedAt: NOW,
    })
  await em.flush()
}

test('a second start finds everything and makes nothing anew', async () => {
  const first = await seed()
  expect(first.signIns.map(({ role, password }) => [role, password])).toEqual([
    ['owner', 'tide-berth-quay-0'],
    ['operator', 'tide-berth-quay-1'],
    ['viewer', 'tide-berth-quay-2'],
  ])
  const second = await seed({ passwordsAreNew: false, joiningCode: first.joiningCode })
  expect(second).toEqual(first)

  const em = database.orm.em.fork()
  const overlays = await em.find(OverlaySchema, {}, { populate: ['team'] })
  expect(
    overlays.map(({ slug, demo, pace, disclosure, weights }) => [slug, demo, pace, disclosure, weights]),
  ).toEqual([['harbourline', true, 'steady', 'named', 'delivered']])
  expect(overlays[0]?.team.name).toBe(TEAM)
  const entries = await em.find(AuditEntrySchema, {}, { orderBy: { id: 'asc' } })
  expect(entries.map(({ actor, action, outcome }) => [actor, action, outcome])).toEqual([
    ['demo', 'user.create', 'ok'],
    ['demo', 'user.create', 'ok'],
    ['demo', 'user.create', 'ok'],
    ['r.quill@harbourline.example', 'overlay.create', 'ok'],
    ['r.quill@harbourline.example', 'joining-code.create', 'ok'],
  ])
})

test('the code of the first start serves as long as all agents have joined, and is replaced when they have not', async () => {
  const { joiningCode, overlayId } = await seed()
  const later = new Date(NOW.getTime() + 48 * 3_600_000)
  expect((await seed({ joiningCode }, later)).joiningCode).not.toBe(joiningCode)
  await join(overlayId, init.publicKeys)
  expect((await seed({ joiningCode }, later)).joiningCode).toBe(joiningCode)
})

test('agents whose keys are gone make room for new ones of the same names', async () => {
  const strangers = new Map([...init.publicKeys].slice(0, 35))
  const publicKeys = new Map([...strangers, ['eel-09', generateKeys().publicKey] as const])
  const { overlayId, removedAgents } = await seed({ publicKeys })
  expect(removedAgents).toBe(1)
  const left = await database.orm.em.fork().find(AgentSchema, { overlay: overlayId })
  expect(left).toHaveLength(35)
  expect(left.map(({ name }) => name)).not.toContain('eel-09')
})

test('a password that a person chose is kept and not shown; one of a lost data folder is set anew', async () => {
  const { email } = PEOPLE[1]!
  const passwords = { ...init.passwords, [email]: 'another-one-altogether' }
  const kept = await seed({ passwords, passwordsAreNew: false })
  expect(kept.signIns[1]?.password).toBeNull()
  const renewed = await seed({ passwords, passwordsAreNew: true })
  expect(renewed.signIns[1]?.password).toBe('another-one-altogether')
  const user = await database.orm.em.fork().findOneOrFail(UserSchema, { email })
  expect(await verifyPassword(user.passwordHash, 'another-one-altogether')).toBe(true)
})

test('history is stored whole, marked as demo, and tells what is usual from the first minute', async () => {
  const { overlayId } = await seed()
  const em = database.orm.em.fork()
  expect(await hasReadings(em, overlayId)).toBe(false)
  const values: Record<Phase, number> = { whole: 2, ebb: 1.8, thin: 1, thinner: 0.5, thinnest: 0.2 }
  const samples = Object.fromEntries(PHASES.map((phase) => [phase, [sampleOf(values[phase])]]))
  const random = { uniform: () => 0, uint32: () => 0 }
  const nowMs = NOW.getTime()
  const history = layOutHistory(samples as Record<Phase, Sample[]>, random, nowMs)
  await storeHistory(em, overlayId, history)
  expect(await hasReadings(em, overlayId)).toBe(true)

  const [stored] = await sql<{ count: number; demo: boolean; confidence: number; partitioned: boolean }>(
    em,
    `select count(*)::int as count, bool_and(demo) as demo, min((body->>'confidence')::float8) as confidence,
       bool_and(tableoid <> 'readings_default'::regclass) filter (where at > ?) as partitioned
     from readings where overlay_id = ?`,
    [new Date(Date.now() - 7 * 86_400_000), overlayId],
  )
  expect(stored).toEqual({ count: history.readings.length, demo: true, confidence: 0.9, partitioned: true })
  const events = await sql(
    em,
    `select 1 from overlay_events where overlay_id = ? and data @> '{"demo": true}'`,
    [overlayId],
  )
  expect(events).toHaveLength(history.events.length)
  expect(events.length).toBeGreaterThan(0)
  const log = { warn: () => {} }
  const usual = new Usual({ forkEm: async () => em.fork(), clock: new FakeClock(), log }, { overlayId })
  usual.at(nowMs)
  await usual.settled()
  expect(usual.at(nowMs)).toBe(2)
})

function sampleOf(lambda2: number): Sample {
  const coverage = { joined: 36, heard: 36, prompt: 36, attached: 36, linksMeasured: 112, linksKnown: 0 }
  return {
    estimate: {
      atMs: 0,
      withheld: null,
      lambda2,
      low: lambda2 * 0.98,
      high: lambda2 * 1.02,
      lambda3AtMost: lambda2 * 1.1,
      crossCheck: lambda2,
      settling: false,
      settlesInMs: null,
      answersInMs: null,
      singleCut: false,
      cut: null,
      coverage: { ...coverage, meanWeightedDegree: 6, walkersHeard: 1 },
      seedings: [1],
    },
    agents: [],
    combination: null,
  }
}
