import { randomUUID } from 'node:crypto'
import { beforeEach } from 'vitest'
import { AgentSchema, AgentStateSchema } from '@/entities'
import { BLANK_MEMORY, type Memory } from '@/lib/collector/memory'
import type { Moment, MomentNode } from '@/lib/collector/moment'
import { keepMoment } from '@/lib/collector/moments'
import { query } from '@/lib/collector/query'
import { insertReading } from '@/lib/collector/reading-store'
import type { Reading } from '@/lib/data/dto'
import { overlayPerTest } from './overlay-per-test'
import { someReport } from './reports'

export const MINUTE_MS = 60_000
export const iso = (ms: number) => new Date(ms).toISOString()

export const NAMES = ['tar-01', 'tar-02', 'tar-03', 'eel-07', 'eel-08', 'eel-09']
const isTar = (name: string) => name.startsWith('tar')
const labelsOf = (name: string) => ({
  office: isTar(name) ? 'Tarnwick' : 'Eelholm',
  host: `host-${name}`,
  ...(name !== 'tar-03' && { mains: name.endsWith('1') || name.endsWith('7') ? 'grid' : 'diesel' }),
})
/** A triangle in either office, and two links between them. */
export const LINKS: [a: string, b: string, weight: number, share: number][] = [
  ['tar-01', 'tar-02', 1, 0.02],
  ['tar-02', 'tar-03', 1, 0.02],
  ['tar-01', 'tar-03', 1, 0.02],
  ['eel-07', 'eel-08', 1, 0.02],
  ['eel-08', 'eel-09', 1, 0.02],
  ['eel-07', 'eel-09', 1, 0.02],
  ['eel-07', 'tar-01', 0.75, 0.6],
  ['eel-08', 'tar-02', 0.5, 0.28],
]
const crosses = ([a, b]: (typeof LINKS)[number]) => isTar(a) !== isTar(b)

/** Six nodes in two offices with two links between them, in a new overlay before each test of the file. */
export function weakOverlayPerTest() {
  const seeded = overlayPerTest({ pace: 'calm' })
  const { em } = seeded
  let ids: ReadonlyMap<string, string>
  let now: number
  const idOf = (name: string): string => ids.get(name)!

  const readingNow = (over: Partial<Reading> = {}): Reading => ({
    at: iso(now),
    lambda2: 0.3,
    low: 0.28,
    high: 0.32,
    confidence: 0.9,
    core: null,
    lambda3AtMost: 2,
    crossCheck: 0.3,
    level: 'weak',
    trend: 'steady',
    data: 'fresh',
    verdict: 'Weak. A weak cut parts 3 nodes from 3 and hangs on 2 links.',
    detail: '',
    treatAsSplit: false,
    singleCut: true,
    usual: null,
    sides: [
      { name: 'a', nodes: 3 },
      { name: 'b', nodes: 3 },
    ],
    crossingLinks: 2,
    crossingWeight: 1.25,
    looseEnds: [],
    coverage: { linksKnown: 8, linksMeasured: 8, joined: 6, heard: 6, unheard: 0 },
    seedings: [1],
    last: null,
    demo: false,
    ...over,
  })

  async function storeReading(over: Partial<Reading> = {}) {
    await insertReading(em(), seeded.overlay.id, readingNow(over))
  }

  async function storeMemory(over: Partial<Memory> = {}) {
    const sides = Object.fromEntries(
      [...ids].map(([name, agentId]) => [agentId, isTar(name) ? ('a' as const) : ('b' as const)]),
    )
    const cut = { sweep: 1, aboveIs: 'b' as const, nodes: { a: 3, b: 3 }, links: 2, weight: 1.25 }
    const memory: Memory = { ...BLANK_MEMORY, cut, sides, singleCut: true, ...over }
    await query(
      em(),
      `insert into controls (overlay_id, updated_at, state) values (?, clock_timestamp(), ?::jsonb)
     on conflict (overlay_id) do update set state = excluded.state`,
      [seeded.overlay.id, JSON.stringify({ version: 1, control: {}, memory })],
    )
  }

  /** As ingest keeps what an agent last said, a while ago. */
  async function report(name: string, links: typeof LINKS, secondsAgo = 0) {
    const own = links.filter(([a, b]) => a === name || b === name)
    const { sums, node } = someReport(1)
    await em().insert(AgentStateSchema, {
      agentId: idOf(name),
      overlayId: seeded.overlay.id,
      incarnation: 'one',
      reportNumber: 1,
      ordersSequence: 0,
      receivedAt: new Date(Date.now() - secondsAgo * 1000),
      sums,
      node: {
        ...node,
        degree: LINKS.filter(([a, b]) => a === name || b === name).length,
        weightedDegree: own.reduce((sum, [, , weight]) => sum + weight, 0),
        links: own.map(([a, b, weight, share]) => ({ peer: idOf(a === name ? b : a), weight, share })),
      },
    })
  }

  const momentNode = (name: string, index: number): MomentNode => ({
    agentId: idOf(name),
    name,
    labels: labelsOf(name),
    state: 'heard',
    side: isTar(name) ? 'a' : 'b',
    value: index / 4,
    degree: 3,
    weightedDegree: 2 + index / 4,
  })
  const keep = (minutesAgo: number, over: Partial<Moment> = {}) =>
    em().transactional((tx) =>
      keepMoment(tx, seeded.overlay.id, {
        atMs: now - minutesAgo * MINUTE_MS,
        nodes: NAMES.map(momentNode),
        links: LINKS.filter(crosses).map(([a, b, weight, share]) => ({
          a: idOf(a),
          b: idOf(b),
          weight: weight + minutesAgo / 100,
          share,
          lost: false,
        })),
        reading: readingNow({ at: iso(now - minutesAgo * MINUTE_MS), lambda2: 0.3 + minutesAgo / 100 }),
        ...over,
      }),
    )
  const said = (kind: 'link-lost' | 'link-found', minutesAgo: number, ...links: [string, string][]) =>
    query(
      em(),
      `insert into overlay_events (overlay_id, at, kind, text, data) values (?, ?, ?, 'said', ?::jsonb)`,
      [seeded.overlay.id, new Date(now - minutesAgo * MINUTE_MS), kind, JSON.stringify({ links })],
    )

  beforeEach(async () => {
    now = Date.now()
    ids = new Map(NAMES.map((name) => [name, randomUUID()]))
    await em().insertMany(
      AgentSchema,
      NAMES.map((name) => ({
        ...{ id: idOf(name), overlay: seeded.overlay.id, name, labels: labelsOf(name) },
        ...{ publicKey: 'p', version: '0.1.0', joinedAt: new Date(), state: 'joined' as const },
      })),
    )
  })

  async function weakNow(over: Partial<Reading> = {}) {
    await storeMemory()
    for (const name of NAMES) await report(name, LINKS)
    await storeReading(over)
  }

  return {
    seeded,
    em,
    readingNow,
    storeReading,
    storeMemory,
    report,
    momentNode,
    keep,
    said,
    weakNow,
    /** When the test began, milliseconds since 1970. */
    get now() {
      return now
    },
  }
}
