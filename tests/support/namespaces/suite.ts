/** Twelve agents in network namespaces, in two halves of six whose cables are pulled and plugged; the collector moves. */
import { createHash } from 'node:crypto'
import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest'
import type { Reading } from '@/lib/data/dto'
import { type Edge, fromEdges } from '@/lib/method/graph'
import type { PaceName } from '@/lib/method/pace'
import { algebraicConnectivity } from '@/lib/method/spectrum'
import { generateKeys } from '@/lib/protocol'
import { enrolBody, seedCode, seedOverlay } from '../collector'
import { createTestDatabase, type TestDatabase } from '../database'
import { Child } from '../e2e/child'
import { twoSides } from '../e2e/two-sides'
import { seedTeam } from '../people'
import { eventually, isLike, PATIENCE_MS, until } from '../until'
import { booksOf } from '../walker-books'
import { NamespacedAgents } from './agents'
import { NamespaceLab, whyNoNamespaces } from './lab'
import { OverlayReader } from './reader'

const SLUG = 'namespaces'
const PORT = 3100
const TOLERANCE = 0.05
const IN_A_ROW = 3
/** Enough that fewer than 85 % of those joined are heard. */
const SILENT = 3
const overlay = twoSides(6, [1, 2], [0, 2, 4])
const { Tarnwick, Eelholm } = overlay.offices
/** Where the collector can be inside of a half, the cable that then joins it to the other, and who is beyond. */
const PLACES = {
  Tarnwick: { place: 0, way: 'reports-b', beyond: Eelholm, away: 'Eelholm' },
  Eelholm: { place: 1, way: 'reports-a', beyond: Tarnwick, away: 'Tarnwick' },
} as const
export type Inside = keyof typeof PLACES

const whole = exactLambda2(overlay.links)

const why = whyNoNamespaces()
if (why !== null) process.stdout.write(`Network namespaces are left out: ${why}.\n`)

const lab = new NamespaceLab([Tarnwick, Eelholm])
let database: TestDatabase
let collector: Child
let agents: NamespacedAgents
let reader: OverlayReader
let code = ''
const times: string[] = []

export interface NamespaceSuiteInit {
  pace: PaceName
  /** Whether the halves are also parted while the collector stands outside of both. */
  partsOutside: boolean
  /** The halves in which the collector stands, one after the other, after it stood outside of both. */
  inside: readonly Inside[]
}

export function namespaceSuite({ pace, partsOutside, inside }: NamespaceSuiteInit): void {
  describe.skipIf(why !== null)('twelve agents in namespaces on two bridges', () => {
    beforeAll(async () => {
      database = await createTestDatabase()
      const now = new Date()
      const { teamId, members } = await seedTeam(database.orm.em.fork(), 'harbourline', ['viewer'], now)
      const { id } = await seedOverlay(database, teamId, { slug: SLUG, pace })
      reader = new OverlayReader({ database }, { userId: members[0]?.userId ?? '', slug: SLUG })
      lab.build()
      lab.plugCollector('outside')
      collector = await startCollector()
      code = await seedCode(database, id, { uses: 12 + SILENT })
      agents = new NamespacedAgents(
        { lab },
        {
          collector: collectorUrl(),
          code,
          nodes: Object.entries(overlay.offices).flatMap(([harbour, names]) =>
            names.map((name) => ({
              name,
              labels: { harbour },
              neighbours: overlay.links.filter(([one]) => one === name).map(([, other]) => other),
            })),
          ),
        },
      )
      await timed('start', () => agents.start())
    })
    afterAll(async () => {
      await agents?.stop()
      await collector?.stop()
      lab.remove()
      await database?.close()
      process.stdout.write(`namespaces: ${times.join(', ')}\n`)
    })
    afterEach(() => lab.join('links', 'reports-a', 'reports-b'))

    it('are read within 5 % of the exact value, each half a side, with the collector outside of both', async () => {
      await timed('read from cold', () =>
        readsWhole({
          crossingLinks: 3,
          coverage: { joined: 12, heard: 12, unheard: 0, linksKnown: 27, linksMeasured: 27 },
        }),
      )
      await expectHalvesAsSides()
      await expectOwnBooksBalance()
    })

    it.skipIf(!partsOutside)(
      'are split and all heard when only the cable between the halves is pulled',
      async () => {
        lab.cut('links')
        const reading = await timed('cable pulled', () =>
          reader.until(
            'split, with all heard',
            ({ level, crossingLinks }) => level === 'split' && crossingLinks === 0,
            PATIENCE_MS,
            state,
          ),
        )
        expect(reading).toMatchObject({ treatAsSplit: false, coverage: { heard: 12, unheard: 0 } })
        expect(reading.verdict).toBe('Split. No link is left between 6 nodes and the other 6.')
        // The cut is counted at once; the value sinks as the halves come apart.
        await timed('as good as zero', () =>
          reader.until('a reading under 0.01', ({ lambda2 }) => (lambda2 ?? 1) < 0.01, PATIENCE_MS, state),
        )
        await expectHalvesAsSides()
        await expectOwnBooksBalance()
      },
    )

    it.skipIf(!partsOutside)('are read as before when the cable is plugged in again', async () => {
      lab.join('links')
      await timed('plugged in', () => readsWhole())
      await expectHalvesAsSides()
    })

    it('are all heard, half of them through neighbours, when a half loses its own way to the collector', async () => {
      const from = reader.seen.length
      lab.cut('reports-b')
      const reading = await timed('heard through neighbours', () =>
        reader.until(
          'all heard, Eelholm through neighbours',
          async ({ data, coverage }) =>
            data === 'fresh' && coverage.heard === 12 && sameNames(await relayedNodes(), Eelholm),
          PATIENCE_MS,
          state,
        ),
      )
      expect(reading).toMatchObject({ treatAsSplit: false, coverage: { heard: 12, unheard: 0 } })
      await readsWhole()
      expect(reader.seen.slice(from).filter(({ coverage }) => coverage.unheard > 0)).toEqual([])
      await expectHalvesAsSides()
      lab.join('reports-b')
      await timed('own way again', () =>
        reader.until(
          'none through neighbours',
          async () => (await relayedNodes()).length === 0,
          PATIENCE_MS,
          state,
        ),
      )
    })

    it.each(inside.map((name) => ({ inside: name, ...PLACES[name] })))(
      'are to be treated as split when all cables are pulled and the collector is inside $inside',
      async ({ place, way, beyond, away }) => {
        lab.plugCollector(place)
        await readsWhole()
        const from = reader.seen.length
        lab.cut('links', way)
        const reading = await timed(`${away} cut off`, () =>
          reader.until(
            `"treat as split" with ${away} unheard`,
            ({ treatAsSplit, coverage }) => treatAsSplit && coverage.unheard === 6,
            PATIENCE_MS,
            state,
          ),
        )
        expect(reading).toMatchObject({
          lambda2: null,
          level: 'split',
          data: 'unheard',
          coverage: { heard: 6 },
        })
        expect(reading.verdict).toBe('Treat as split. 6 nodes are unheard, all beyond the last weak cut.')
        expect(reading.detail).toContain(`${away} fell silent together.`)
        expect(reader.seen.slice(from).filter(isBetter)).toEqual([])
        await eventually(async () => {
          const nodes = await reader.nodes()
          expect(nodes.filter(({ state }) => state === 'unheard').map(({ name }) => name)).toEqual(beyond)
        })
        await expectOwnBooksBalance()
        lab.join('links', way)
        await timed(`${away} back`, () => readsWhole())
        await expectHalvesAsSides()
        await expectOwnBooksBalance()
      },
    )

    it('can have their program from the collector’s own process', async () => {
      const facts = await (await fetch(`${collectorUrl()}/agent/thinspan-agent.json`)).json()
      const file = await (await fetch(`${collectorUrl()}/agent/thinspan-agent.mjs`)).arrayBuffer()
      const sha256 = createHash('sha256').update(new Uint8Array(file)).digest('hex')
      expect(facts).toMatchObject({ sha256, bytes: file.byteLength })
    })

    it('have lost no walker and made none: once nothing walks, all that was sent has arrived', async () => {
      // Joined and never heard: from under 85 % heard on, orders stop all walking.
      await joinSilentAgents(SILENT)
      await reader.until(
        'withheld',
        ({ lambda2, coverage }) => lambda2 === null && coverage.joined === 12 + SILENT,
        PATIENCE_MS,
        state,
      )
      const books = await balanced()
      expect(books.length).toBeGreaterThanOrEqual(5)
      expect(books.map(({ slot, held, sent }) => ({ slot, made: held, received: sent }))).toEqual(
        books.map(({ slot, made, received }) => ({ slot, made, received })),
      )
      expect(agents.ended).toEqual([])
    })
  })
}

function readsWhole(wanted: object = {}): Promise<Reading> {
  let inARow = 0
  return reader.until(
    `${IN_A_ROW} fresh readings within 5 % of ${whole}, with ${JSON.stringify(wanted)}`,
    (reading) => {
      const { lambda2, data, coverage } = reading
      const isNear = lambda2 !== null && Math.abs(lambda2 / whole - 1) < TOLERANCE
      inARow = isNear && data === 'fresh' && coverage.heard === 12 && isLike(reading, wanted) ? inARow + 1 : 0
      return inARow === IN_A_ROW
    },
    PATIENCE_MS,
    state,
  )
}

/** Than the whole is. What settles yet says by its interval how far off it may be: such a reading is held to that. */
function isBetter({ data, lambda2, low }: Reading): boolean {
  const [value, margin] = data === 'fresh' ? [lambda2, 2 * TOLERANCE] : [low, TOLERANCE]
  return (value ?? 0) > whole * (1 + margin)
}

function expectHalvesAsSides(): Promise<void> {
  return eventually(async () => {
    const nodes = await reader.nodes()
    const sideOf = (name: string) => nodes.find((node) => node.name === name)?.side
    const [one, other] = sideOf('eel-01') === 'a' ? ['a', 'b'] : ['b', 'a']
    expect(nodes.map(({ name, side }) => `${name} ${side}`)).toEqual([
      ...Eelholm.map((name) => `${name} ${one}`),
      ...Tarnwick.map((name) => `${name} ${other}`),
    ])
  })
}

/** At every agent: held = seeded + births − kills − culls − dropped − sent + received. */
async function expectOwnBooksBalance(): Promise<void> {
  const books = (await reader.sums()).flatMap((sums) => booksOf([sums]))
  expect(books.map(({ held }) => held)).toEqual(
    books.map(({ made, sent, received }) => made - sent + received),
  )
}

/** The books once all that was sent has arrived. @throws with them where it does not */
async function balanced() {
  let books: ReturnType<typeof booksOf> = []
  const isEven = async () => {
    books = booksOf(await reader.sums())
    return books.length > 0 && books.every(({ sent, received }) => sent === received)
  }
  await until(isEven, { explain: () => JSON.stringify(books) })
  return books
}

async function relayedNodes(): Promise<string[]> {
  return (await reader.nodes()).filter(({ relayed }) => relayed).map(({ name }) => name)
}

function sameNames(some: readonly string[], others: readonly string[]): boolean {
  return some.length === others.length && some.every((name) => others.includes(name))
}

async function joinSilentAgents(count: number): Promise<void> {
  for (let index = 0; index < count; index++) {
    const body = JSON.stringify(enrolBody(code, `pin-0${index + 1}`, generateKeys()))
    const headers = { 'content-type': 'application/json' }
    const response = await fetch(`${collectorUrl()}/api/agent/enrol`, { method: 'POST', headers, body })
    expect(response.status).toBeLessThan(300)
  }
}

function exactLambda2(links: readonly (readonly [string, string])[]): number {
  const names = [...new Set(links.flat())].sort()
  const edges = links.map(([a, b]): Edge => [names.indexOf(a), names.indexOf(b), 1])
  return algebraicConnectivity(fromEdges(names.length, edges)).lambda2
}

async function startCollector(): Promise<Child> {
  let listens = () => {}
  const ready = new Promise<null>((resolve) => {
    listens = () => resolve(null)
  })
  const child = new Child(process.execPath, ['scripts/collector.mjs'], {
    env: { HOST: lab.collectorHost, PORT: String(PORT), DATABASE_URL: database.url },
    onLine: (line) => {
      if (line.startsWith('Collector listens')) listens()
    },
  })
  const end = await Promise.race([ready, child.end])
  if (end !== null) throw new Error(`The collector ${end}.\n${child.tail()}`)
  return child
}

const collectorUrl = (): string => `http://${lab.collectorHost}:${PORT}`

function state(): string {
  return `Agents:\n${agents.tail()}\nCollector:\n${collector.tail()}`
}

async function timed<T>(what: string, work: () => Promise<T>): Promise<T> {
  const startedMs = performance.now()
  const value = await work()
  times.push(`${what} ${((performance.now() - startedMs) / 1000).toFixed(1)} s`)
  return value
}
