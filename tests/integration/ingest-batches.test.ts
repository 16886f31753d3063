import { afterAll, beforeAll, expect, it } from 'vitest'
import { AgentStateSchema } from '@/entities'
import { BATCH_MOST, BATCHES_AT_ONCE, Ingest } from '@/lib/collector/ingest'
import { systemClock } from '@/lib/collector/process'
import { setRuntime } from '@/lib/http/runtime'
import { joinAgent, type Member, seedCode, seedOverlay } from '../support/collector'
import { createTestDatabase, type TestDatabase } from '../support/database'
import { seedTeam, testRuntime } from '../support/people'
import { someReport } from '../support/reports'

let database: TestDatabase
let member: Member

beforeAll(async () => {
  database = await createTestDatabase()
  setRuntime(testRuntime(database, () => new Date()))
  const { teamId } = await seedTeam(database.orm.em.fork(), 'harbourline', ['owner'], new Date())
  const { id } = await seedOverlay(database, teamId, { slug: 'tides' })
  member = await joinAgent(await seedCode(database, id), 'tar-01')
})
afterAll(async () => {
  setRuntime(undefined)
  await database.close()
})

it('more reports than all batches together hold are answered all the same, the last one is kept, and stopping waits for them', async () => {
  let begun = 0
  let most = 0
  const ingest = new Ingest({
    clock: systemClock,
    forkEm: async () => {
      begun += 1
      most = Math.max(most, begun)
      return database.orm.em.fork()
    },
  })
  const count = (BATCHES_AT_ONCE + 1) * BATCH_MOST + 7
  const answers = Array.from({ length: count }, (_, index) =>
    ingest.submit(member.token, someReport(index + 1)).answer.finally(() => {
      if (index % BATCH_MOST === 0) begun -= 1
    }),
  )
  // Nothing has ended yet: the rest waits, however much it is.
  expect(begun).toBe(BATCHES_AT_ONCE)
  await ingest.stop()
  expect(await Promise.allSettled(answers)).toHaveLength(count)
  expect((await Promise.allSettled(answers)).filter(({ status }) => status === 'rejected')).toEqual([])
  expect(most).toBe(BATCHES_AT_ONCE)
  const held = await database.orm.em.fork().findOneOrFail(AgentStateSchema, member.agentId)
  expect(Number(held.reportNumber)).toBe(count)
})

it('what comes while it stops is stored before it has stopped, without waiting for others', async () => {
  const ingest = new Ingest({
    clock: { ...systemClock, after: () => () => {} },
    forkEm: async () => database.orm.em.fork(),
  })
  const first = ingest.submit(member.token, someReport(100_001)).answer
  const stopping = ingest.stop()
  const second = ingest.submit(member.token, someReport(100_002)).answer
  let answered = 0
  for (const answer of [first, second])
    answer.finally(() => {
      answered += 1
    })
  await stopping
  expect(answered).toBe(2)
  const held = await database.orm.em.fork().findOneOrFail(AgentStateSchema, member.agentId)
  expect(Number(held.reportNumber)).toBe(100_002)
})
