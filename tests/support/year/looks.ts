import { USUAL_MOST_DAYS, Usual } from '@/lib/collector/usual'
import { getCut } from '@/lib/data/cut'
import { followOverlay, listEvents } from '@/lib/data/events'
import { listLinks } from '@/lib/data/links'
import { listNodes } from '@/lib/data/nodes'
import { getOverlay, listOverlays } from '@/lib/data/overlays'
import { getReading } from '@/lib/data/readings'
import { getReadings } from '@/lib/data/readings-list'
import { RANGES } from '@/lib/face/range'
import type { Call } from '@/lib/http/call'
import type { TestDatabase } from '../database'
import { FakeClock } from '../fake-clock'
import { DAY_MS } from './lay'

export interface Look {
  run(): Promise<unknown>
  /** Nothing older is asked for; null where nothing of the past is. */
  fromMs: number | null
}

/** What pages and programs ask of an overlay with a long past, by name. */
export function looksAt(
  database: TestDatabase,
  call: () => Promise<Call>,
  overlay: { id: string; slug: string },
  now: Date,
): Record<string, Look> {
  const { id, slug } = overlay
  const nowMs = now.getTime()
  const page = { limit: 1_000 }
  const at = (daysBack: number) => new Date(nowMs - daysBack * DAY_MS - 90_000).toISOString()
  const forkEm = async () => database.orm.em.fork()
  const ask = <T>(fromMs: number | null, run: (call: Call) => Promise<T>): Look => ({
    run: async () => run(await call()),
    fromMs,
  })
  const lately = nowMs - 3_600_000
  const then = (daysBack: number) => nowMs - daysBack * DAY_MS - 2 * 3_600_000
  const past = Object.fromEntries(
    [1, 20, 200].flatMap((days) => [
      [`reading ${days} d ago`, ask(then(days), (c) => getReading(c, slug, { at: at(days) }))],
      [`cut ${days} d ago`, ask(then(days), (c) => getCut(c, slug, { at: at(days) }))],
      [`nodes ${days} d ago`, ask(then(days), (c) => listNodes(c, slug, { ...page, at: at(days) }))],
    ]),
  )
  const trends = Object.fromEntries(
    RANGES.map(({ id: name, seconds, stepSeconds }) => [
      `trend ${name}`,
      ask(nowMs - seconds * 1000, (c) =>
        getReadings(c, slug, {
          from: new Date(nowMs - seconds * 1000).toISOString(),
          to: now.toISOString(),
          step: stepSeconds,
        }),
      ),
    ]),
  )
  return {
    overlays: ask(null, listOverlays),
    overlay: ask(null, (c) => getOverlay(c, slug)),
    reading: ask(lately, (c) => getReading(c, slug)),
    cut: ask(lately, (c) => getCut(c, slug)),
    nodes: ask(null, (c) => listNodes(c, slug, page)),
    links: ask(null, (c) => listLinks(c, slug, page)),
    events: ask(null, (c) => listEvents(c, slug)),
    'event stream': ask(lately, async (c) => {
      const stream = await followOverlay(c, slug, { forkEm, now: () => now })
      await stream.load('reading')
      await stream.load('event')
    }),
    usual: ask(nowMs - USUAL_MOST_DAYS * DAY_MS, async () => {
      const usual = new Usual({ forkEm, clock: new FakeClock(), log: { warn: () => {} } }, { overlayId: id })
      usual.at(nowMs)
      await usual.settled()
    }),
    ...trends,
    'trend of an hour, 80 d ago': ask(then(80), (c) =>
      getReadings(c, slug, { from: at(80), to: new Date(Date.parse(at(80)) + 3_600_000).toISOString() }),
    ),
    ...past,
  }
}
