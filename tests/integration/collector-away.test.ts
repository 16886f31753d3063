import { afterAll, beforeAll, expect, test } from 'vitest'
import { OverlayEventSchema } from '@/entities'
import { setRuntime } from '@/lib/http/runtime'
import type { AwaySummary } from '@/lib/protocol'
import { joinAgent, type Member, seedCode, seedOverlay, sendReport } from '../support/collector'
import { createTestDatabase, type TestDatabase } from '../support/database'
import { seedTeam, testRuntime } from '../support/people'
import { someReport } from '../support/reports'

let database: TestDatabase
let overlay: { id: string; slug: string }
let number = 0

beforeAll(async () => {
  database = await createTestDatabase()
  setRuntime(testRuntime(database, () => new Date()))
  const { teamId } = await seedTeam(database.orm.em.fork(), 'harbourline', ['owner'], new Date())
  overlay = await seedOverlay(database, teamId, { slug: 'tides' })
})
afterAll(async () => {
  setRuntime(undefined)
  await database.close()
})

const at = (minute: number) => new Date(Date.UTC(2031, 4, 6, 12, minute)).toISOString()
const span = (from: number, to: number, linkDowns: number): AwaySummary => ({
  fromAt: at(from),
  toAt: at(to),
  leastLive: 4 - linkDowns,
  known: 4,
  linkDowns,
})
const join = async (name: string): Promise<Member> => joinAgent(await seedCode(database, overlay.id), name)
const tell = async (member: Member, away: unknown) => {
  const report = someReport(++number)
  return (await sendReport(member, { ...report, protocol: 2, away })).status
}
const events = async () => {
  const found = await database.orm.em.fork().find(OverlayEventSchema, { kind: 'collector-away' })
  return found.map(({ text }) => text)
}

test('a time away in which links were lost is an event, once; one in which none was is not', async () => {
  const [tar, gul] = [await join('tar-01'), await join('gul-04')]
  expect(await tell(gul, [span(0, 9, 0)])).toBe(200)
  expect(await events()).toEqual([])
  expect(await tell(tar, [span(0, 9, 2), span(12, 13, 0), span(20, 31, 1)])).toBe(200)
  expect(await tell(tar, [span(0, 9, 2), span(12, 13, 0), span(20, 31, 1)])).toBe(200)
  expect(await tell(gul, [span(1, 2, 1)])).toBe(200)
  expect((await events()).sort()).toEqual([
    "Out of the collector's reach from 2031-05-06 12:00 UTC to 2031-05-06 12:31 UTC, 3 times a link of tar-01 went down: at the least 2 of 4 were up",
    "Out of the collector's reach from 2031-05-06 12:01 UTC to 2031-05-06 12:02 UTC, a link of gul-04 went down: at the least 3 of 4 were up",
  ])
})

test('what is no time away is refused', async () => {
  const eel = await join('eel-09')
  expect(await tell(eel, [{ ...span(0, 1, 0), fromAt: 'noon' }])).toBe(400)
  expect(
    await tell(
      eel,
      Array.from({ length: 9 }, () => span(0, 1, 0)),
    ),
  ).toBe(400)
})
