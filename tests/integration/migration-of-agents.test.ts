import { afterAll, beforeAll, expect, it } from 'vitest'
import { sql } from '@/lib/db'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { someOrders } from '@/tests/support/frames'
import { someReport } from '@/tests/support/reports'

let database: TestDatabase
beforeAll(async () => {
  database = await createTestDatabase()
})
afterAll(() => database.close())

const id = (n: number) => `00000000-0000-4000-8000-00000000000${n}`

it('what agents and leaders left in an older database is still there after the migration, and after going back', async () => {
  const em = database.orm.em.fork()
  await database.orm.migrator.down('2026-12-06-agents-in-service')
  await sql(
    em,
    `insert into teams (id, slug, name, created_at) values (?, 'harbourline', 'Harbourline', now())`,
    [id(1)],
  )
  await sql(
    em,
    `insert into overlays (id, team_id, slug, name, pace, disclosure, weights, public_key, private_key, created_at)
     values (?, ?, 'tides', 'Tides', 'steady', 'named', 'unit', 'p', 's', now())`,
    [id(2), id(1)],
  )
  await sql(
    em,
    `insert into agents (id, overlay_id, name, public_key, labels, version, joined_at, state)
     values (?, ?, 'tar-01', 'k', '{}', '0.1.0', now(), 'joined'), (?, ?, 'eel-09', 'l', '{}', '0.1.0', now(), 'left')`,
    [id(3), id(2), id(4), id(2)],
  )
  await sql(
    em,
    `insert into agent_states (agent_id, overlay_id, incarnation, previous_incarnation, report_number, orders_sequence,
       sums, node, received_at) values (?, ?, 'now', 'before', 7, 5, '{}', '{}', now())`,
    [id(3), id(2)],
  )
  await sql(
    em,
    `insert into controls (overlay_id, orders, sequence, updated_at) values (?, ?::jsonb, 7, now())`,
    [id(2), JSON.stringify(someOrders(7))],
  )

  await database.orm.migrator.up()
  const [control] = await sql<{ text: string; key: string | null }>(
    em,
    'select orders_text as text, orders_key as key from controls',
  )
  expect([JSON.parse(control!.text), control!.key]).toEqual([someOrders(7), null])
  const [state] = await sql(em, 'select former_incarnations as former, relayed, complaints from agent_states')
  expect(state).toEqual({ former: ['before'], relayed: false, complaints: [] })
  const [passes] = await sql<{ hours: number }>(
    em,
    `select round(extract(epoch from min(pass_ends_at) - now()) / 3600)::int as hours from agents`,
  )
  expect(passes?.hours).toBe(24)
  // The name of one that left is free, that of another is not.
  const again = (name: string) =>
    sql(
      em,
      `insert into agents (overlay_id, name, public_key, labels, version, joined_at) values (?, ?, 'm', '{}', '', now())`,
      [id(2), name],
    )
  await again('eel-09')
  await expect(again('tar-01')).rejects.toThrow('agents_name')

  await database.orm.migrator.down('2026-12-06-agents-in-service')
  const [before] = await sql(em, 'select previous_incarnation as previous from agent_states')
  expect(before).toEqual({ previous: 'before' })
  expect(await sql(em, 'select orders from controls')).toEqual([{ orders: someOrders(7) }])
  expect(await sql(em, 'select name, state from agents order by name')).toEqual([
    { name: 'eel-09', state: 'joined' },
    { name: 'tar-01', state: 'joined' },
  ])
})

it('reports that are held say the same before the migration to plain text, after it, and after going back', async () => {
  const em = database.orm.em.fork()
  const said = async () => (await sql(em, 'select sums, node from agent_states'))[0]
  const report = someReport(7)
  const there = { sums: report.sums, node: report.node }
  await sql(em, 'update agent_states set sums = ?, node = ?', [
    JSON.stringify(there.sums),
    JSON.stringify(there.node),
  ])
  await database.orm.migrator.down('2026-12-09-plain-reports')
  expect(await said()).toEqual(there)
  await database.orm.migrator.up()
  expect(await said()).toEqual(there)
})
