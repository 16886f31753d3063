import { afterAll, beforeAll, expect, it } from 'vitest'
import { prepared } from '@/lib/collector/query'
import { asAppError } from '@/lib/http/problem'
import { createTestDatabase, type TestDatabase } from '../support/database'

let database: TestDatabase
beforeAll(async () => {
  database = await createTestDatabase()
})
afterAll(() => database.close())

const BACKEND = { name: 'backend', text: 'select pg_backend_pid() as pid, $1::int as given' }
const SLOW = { name: 'slow', text: 'select pg_sleep($1)' }

it('keep to one connection, give up where no answer comes in time, and go on with another one', async () => {
  const em = database.orm.em.fork()
  const ask = async (given: number) =>
    (await prepared<{ pid: number; given: number }>(em, BACKEND, [given]))[0]
  const first = await ask(1)
  expect(first).toMatchObject({ given: 1 })
  expect(await ask(2)).toEqual({ pid: first?.pid, given: 2 })
  const error = await prepared(em, SLOW, [5], 50).catch((reason: unknown) => reason)
  expect(asAppError(error)).toMatchObject({ code: 'unavailable', data: { retryAfterSeconds: 2 } })
  const after = await ask(3)
  expect(after).toMatchObject({ given: 3 })
  expect(after?.pid).not.toBe(first?.pid)
})
