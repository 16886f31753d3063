import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { GET as cutRoute } from '@/app/api/v1/overlays/[slug]/cut/route'
import { GET as eventsRoute } from '@/app/api/v1/overlays/[slug]/events/route'
import { GET as linksRoute } from '@/app/api/v1/overlays/[slug]/links/route'
import { GET as nodesRoute } from '@/app/api/v1/overlays/[slug]/nodes/route'
import { GET as readingRoute } from '@/app/api/v1/overlays/[slug]/reading/route'
import { GET as readingsRoute } from '@/app/api/v1/overlays/[slug]/readings/route'
import { ApiTokenSchema } from '@/entities'
import { newSecret, sha256Hex } from '@/lib/auth/secrets'
import {
  cutSchema,
  eventSchema,
  eventsSchema,
  linksSchema,
  nodesSchema,
  type Reading,
  readingSchema,
  readingsSchema,
} from '@/lib/data/dto'
import { closeDatabase } from '@/lib/db'
import type { RouteHandler } from '@/lib/http/route'
import { setRuntime } from '@/lib/http/runtime'
import { fromEdges } from '@/lib/method/graph'
import { algebraicConnectivity } from '@/lib/method/spectrum'
import { seedCode, seedOverlay } from '@/tests/support/collector'
import { createTestDatabase, type TestDatabase } from '@/tests/support/database'
import { startTestLeader, type TestLeader } from '@/tests/support/leaders'
import { seedTeam, testRuntime } from '@/tests/support/people'
import { readStream, type StreamMessage } from '@/tests/support/streams'
import { Swarm } from '@/tests/support/swarm'
import { eventually, isLike, within } from '@/tests/support/until'

/** Six nodes in Tarnwick, six in Eelholm; links across join 2 – 8, 5 – 11 and 0 – 6. */
const WITHIN: [number, number][] = [
  ...[0, 1, 2, 3, 4, 5].map((i): [number, number] => [i, (i + 1) % 6]),
  [0, 3],
  [1, 4],
  ...[0, 1, 2, 3, 4, 5].map((i): [number, number] => [6 + i, 6 + ((i + 1) % 6)]),
  [6, 9],
  [7, 10],
]
const ACROSS: [number, number][] = [
  [2, 8],
  [5, 11],
  [0, 6],
]
const exact = (edges: readonly [number, number][]): number =>
  algebraicConnectivity(fromEdges(12, edges)).lambda2
const nameOf = (index: number): string => `${index < 6 ? 'tar' : 'eel'}-${String(index).padStart(2, '0')}`

let database: TestDatabase
let leader: TestLeader
let token: string
let stream: ReturnType<typeof readStream>
const swarm = new Swarm(11)
const stop = new AbortController()

beforeAll(async () => {
  database = await createTestDatabase()
  // The stream listens over the process's own connection.
  process.env.DATABASE_URL = database.url
  const runtime = testRuntime(database, () => new Date())
  setRuntime(runtime)
  leader = startTestLeader(database, 5)
  const em = database.orm.em.fork()
  const { teamId, members } = await seedTeam(em, 'harbourline', ['viewer'], new Date())
  token = newSecret()
  await em.insert(ApiTokenSchema, {
    team: teamId,
    createdBy: members[0]!.userId,
    scope: 'read',
    hash: sha256Hex(token),
    createdAt: new Date(),
  })
  const overlay = await seedOverlay(database, teamId, { slug: 'tides' })
  expect(await get(readingRoute, readingSchema)).toMatchObject({
    data: 'settling',
    verdict: 'No agents have joined yet.',
  })
  const response = await ask(eventsRoute, '', { accept: 'text/event-stream' }, stop.signal)
  stream = readStream(response)
  await swarm.join(
    await seedCode(database, overlay.id, { uses: 12 }),
    Array.from({ length: 12 }, (_, index) => ({
      name: nameOf(index),
      labels: { harbour: index < 6 ? 'Tarnwick' : 'Eelholm' },
    })),
  )
  for (const [a, b] of [...WITHIN, ...ACROSS]) swarm.link(a, b)
  swarm.start()
})
afterAll(async () => {
  stop.abort()
  swarm.stop()
  await leader.stop()
  setRuntime(undefined)
  await closeDatabase()
  delete process.env.DATABASE_URL
  await database.close()
})

function ask(
  handler: RouteHandler,
  query = '',
  headers: Record<string, string> = {},
  signal?: AbortSignal,
): Promise<Response> {
  const request = new Request(`http://thinspan.test/api/v1/overlays/tides/x${query}`, {
    headers: { authorization: `Bearer ${token}`, ...headers },
    signal,
  })
  return handler(request, { params: Promise.resolve({ slug: 'tides' }) })
}

async function get<T>(handler: RouteHandler, schema: { parse(value: unknown): T }, query = ''): Promise<T> {
  const response = await ask(handler, query)
  expect(response.status).toBe(200)
  return schema.parse(await response.json())
}

/** The next readings of the stream, until one is as wanted. */
function until(
  wanted: (reading: Reading) => boolean,
  look: () => Promise<void> = async () => {},
): Promise<Reading> {
  let last: Reading | null = null
  const follow = async () => {
    for (;;) {
      const message: StreamMessage | null = await stream.next()
      if (message === null) throw new Error('The stream has ended.')
      if (message.event === 'event') eventSchema.parse(message.data)
      if (message.event !== 'reading') continue
      last = readingSchema.parse(message.data)
      await look()
      if (wanted(last)) return last
    }
  }
  return within(`a reading such that ${wanted}`, follow(), { explain: () => JSON.stringify(last) })
}

/** Until a reading is near the exact value and like this in all else. */
const untilNear = (edges: readonly [number, number][], wanted: object) =>
  until((reading) => within5Percent(exact(edges))(reading) && isLike(reading, wanted))

const within5Percent = (value: number) => (reading: Reading) =>
  reading.data === 'fresh' && Math.abs(reading.lambda2! / value - 1) < 0.05

describe('a swarm of twelve through the collector', () => {
  it('reads within 5 % of the exact value, with sides, crossing links and the label they follow', async () => {
    // The first cut is counted some rounds after the first reading, and at first not by all.
    const reading = await untilNear([...WITHIN, ...ACROSS], {
      level: 'weak',
      sides: [
        { name: 'a', nodes: 6 },
        { name: 'b', nodes: 6 },
      ],
      crossingLinks: 3,
      crossingWeight: 3,
      coverage: { joined: 12, heard: 12, unheard: 0, linksMeasured: 19, linksKnown: 19, leftOut: 0 },
      linkKind: null,
    })
    expect(reading.low!).toBeLessThan(reading.lambda2!)
    await eventually(async () => {
      const nodes = await get(nodesRoute, nodesSchema)
      // Which side is called a was settled by the first cut, which may have been another one.
      const [tarnwick, eelholm] =
        nodes.items.find(({ name }) => name === 'tar-00')?.side === 'b' ? 'ba' : 'ab'
      const cut = await get(cutRoute, cutSchema)
      expect(cut.follows).toEqual({ key: 'harbour', [tarnwick!]: ['Tarnwick'], [eelholm!]: ['Eelholm'] })
      expect(cut.links.map(({ a, b }) => `${a} – ${b}`)).toEqual([
        'eel-06 – tar-00',
        'eel-08 – tar-02',
        'eel-11 – tar-05',
      ])
      const links = await get(linksRoute, linksSchema)
      expect(links.items).toHaveLength(19)
      expect(nodes.items.map(({ name, side, state }) => [name, side, state])).toEqual(
        Array.from({ length: 12 }, (_, index) => nameOf(index))
          .sort()
          .map((name) => [name, name.startsWith('tar') ? tarnwick : eelholm, 'heard']),
      )
    })
  })

  it('has shares that come to one over all links', async () => {
    // Agents tell them by the last combination, so the sum is only near one while the walkers move.
    let sum = 0
    await until(
      () => Math.abs(sum - 1) < 0.1,
      async () => {
        const { items } = await get(linksRoute, linksSchema)
        sum = items.reduce((total, { share }) => total + (share ?? 0), 0)
      },
    )
    expect(Math.abs(sum - 1)).toBeLessThan(0.1)
  })

  it('follows two links that are cut, and lists them as lost', async () => {
    swarm.unlink(0, 6)
    swarm.unlink(5, 11)
    await untilNear([...WITHIN, [2, 8]], {
      level: 'weak',
      crossingLinks: 1,
      verdict: expect.stringContaining('A weak cut parts 6 nodes from 6 and hangs on 1 link.'),
    })
    await eventually(async () => {
      const { items } = await get(eventsRoute, eventsSchema)
      const lost = items.filter(({ kind }) => kind === 'link-lost').map(({ text }) => text)
      expect(lost.join(', ')).toMatch(/eel-06 – tar-00.*|eel-11 – tar-05.*/)
    })
  })

  it('says "treat as split" when a side falls silent, and is never judged better on the way', async () => {
    await swarm.silenceTogether(swarm.nodes.slice(6).map(({ member }) => member.agentId))
    const levels = new Set<Reading['level']>()
    const reading = await until((next) => {
      levels.add(next.level)
      // They fall silent one after the other, within an interval.
      return next.treatAsSplit && next.coverage.unheard === 6
    })
    expect([...levels]).not.toContain('firm')
    expect(reading).toMatchObject({
      lambda2: null,
      level: 'split',
      data: 'unheard',
      verdict: 'Treat as split. 6 nodes are unheard, all beyond the last weak cut.',
    })
    expect(reading.detail).toContain('Eelholm fell silent together.')
    expect(reading.last?.lambda2).toBeGreaterThan(0)
    await eventually(async () => {
      const nodes = await get(nodesRoute, nodesSchema)
      expect(nodes.items.filter(({ state }) => state === 'unheard').map(({ name }) => name)).toEqual(
        [6, 7, 8, 9, 10, 11].map(nameOf),
      )
    })
  })

  it('is back within 5 % when they are heard again', async () => {
    for (const { member } of swarm.nodes) swarm.silence(member.agentId, false)
    await untilNear([...WITHIN, [2, 8]], { level: 'weak', treatAsSplit: false })
    expect(swarm.failure).toBeNull()
    expect(leader.failures).toEqual([])
  })

  it('left a course that can be asked for in steps, and its list of events', async () => {
    const from = new Date(Date.now() - 120_000).toISOString()
    const { items, stepSeconds } = await get(readingsRoute, readingsSchema, `?from=${from}&step=0.2`)
    expect(stepSeconds).toBe(1)
    expect(items.some(({ data, level }) => data === 'unheard' && level === 'split')).toBe(true)
    // A step shows its gravest state: one settling reading in a second is enough to hide the fresh ones.
    expect(
      items.some(({ data, level, lambda2 }) => data !== 'unheard' && level === 'weak' && lambda2! > 0),
    ).toBe(true)
    const times = items.map(({ at }) => Date.parse(at))
    expect(times).toEqual([...new Set(times)].sort((a, b) => a - b))
    const { items: events } = await get(eventsRoute, eventsSchema)
    const kinds = [
      'agent-joined',
      'agent-unheard',
      'agent-heard',
      'level-changed',
      'withheld',
      'resumed',
      'link-lost',
    ]
    expect(events.map(({ kind }) => kind)).toEqual(expect.arrayContaining(kinds))
  })

  it('is given in pages where pages are asked for', async () => {
    const first = await get(nodesRoute, nodesSchema, '?limit=7')
    const second = await get(nodesRoute, nodesSchema, `?limit=7&after=${encodeURIComponent(first.next!)}`)
    expect([first.items.length, second.items.length, second.next]).toEqual([7, 5, null])
    const links = await get(linksRoute, linksSchema, '?limit=9')
    const rest = await get(linksRoute, linksSchema, `?limit=9&after=${encodeURIComponent(links.next!)}`)
    expect([links.items.length, rest.items.length, rest.next]).toEqual([9, 8, null])
  })

  it('is refused to strangers, and bad ranges are told so', async () => {
    const handlers = [readingRoute, readingsRoute, cutRoute, nodesRoute, linksRoute, eventsRoute]
    for (const handler of handlers) {
      expect((await ask(handler, '', { authorization: 'Bearer nobody' })).status).toBe(401)
      const elsewhere = new Request('http://thinspan.test/', {
        headers: { authorization: `Bearer ${token}` },
      })
      const unknown = await handler(elsewhere, { params: Promise.resolve({ slug: 'elsewhere' }) })
      expect([unknown.status, (await unknown.json()).code]).toEqual([404, 'not-found'])
    }
    for (const query of ['?from=yesterday', '?step=0', '?from=2026-12-01T10:00:00Z&to=2026-12-01T10:00:00Z'])
      expect((await ask(readingsRoute, query)).status).toBe(400)
  })
})
