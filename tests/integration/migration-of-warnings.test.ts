import { afterAll, beforeAll, expect, it } from 'vitest'
import { sql } from '@/lib/db'
import { DEFAULT_CALL_ORDER } from '@/lib/warn/call-order'
import { DEFAULT_RULES } from '@/lib/warn/default-rules'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'

let database: TestDatabase
beforeAll(async () => {
  database = await createTestDatabase()
})
afterAll(() => database.close())

const id = (n: number) => `00000000-0000-4000-8000-00000000000${n}`

it('who and what was there before is warned as what begins now', async () => {
  const em = database.orm.em.fork()
  await database.orm.migrator.down({ to: '2026-12-10-warnings' })
  await sql(
    em,
    `insert into teams (id, slug, name, created_at) values (?, 'harbourline', 'Harbourline', now())`,
    [id(1)],
  )
  await sql(
    em,
    `insert into users (id, email, name, created_at) values (?, 'r.quill@harbourline.example', 'R. Quill', now())`,
    [id(2)],
  )
  await sql(
    em,
    `insert into overlays (id, team_id, slug, name, pace, disclosure, weights, public_key, private_key, created_at)
     values (?, ?, 'tides', 'Tides', 'steady', 'named', 'unit', 'p', 's', now())`,
    [id(3), id(1)],
  )
  await database.orm.migrator.up()
  expect(await sql(em, 'select user_id, kind, address, least_severity, quiet, is_on from channels')).toEqual([
    {
      ...{ user_id: id(2), kind: 'email', address: 'r.quill@harbourline.example', least_severity: 'note' },
      ...{ quiet: null, is_on: true },
    },
  ])
  expect(await sql(em, 'select name, steps from call_orders')).toEqual([DEFAULT_CALL_ORDER])
  const rules = await sql(
    em,
    `select settings, severity, is_on as "isOn", on_delay_seconds as "onDelaySeconds", off_delay_seconds as "offDelaySeconds",
       clear_margin_percent as "clearMarginPercent" from warning_rules where call_order_id is not null`,
  )
  expect(rules).toHaveLength(DEFAULT_RULES.length)
  expect(rules).toEqual(expect.arrayContaining([...DEFAULT_RULES]))
})
