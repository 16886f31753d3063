/** The acceptance test of a reading: real agents over WebSocket, a production build, and what a program is told. */
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { TOGETHER_INTERVALS } from '@/lib/collector/unheard'
import { type Cut, LEVELS, type OverlayNode, type Reading } from '@/lib/data/dto'
import { PACES } from '@/lib/method/pace'
import { Api } from '@/tests/support/e2e/api'
import { FleetProcess } from '@/tests/support/e2e/fleet-process'
import { inOneLine, type ReadingStream } from '@/tests/support/e2e/reading-stream'
import { createOwner, createToken, type E2eServer, startServer } from '@/tests/support/e2e/server'
import { twoSides } from '@/tests/support/e2e/two-sides'
import { eventually, isLike } from '@/tests/support/until'

const TOLERANCE = 0.05
/** So many fresh readings in a row within the tolerance: none that drifts by on its way elsewhere passes. */
const IN_A_ROW = 5
const SLUG = 'drill'
const overlay = twoSides(16, [1, 4], [0, 3, 7, 10, 13])
const { Tarnwick, Eelholm } = overlay.offices

let server: E2eServer
let api: Api
let fleet: FleetProcess
let stream: ReadingStream
/** The crossing links that should be left. */
let across = overlay.across.map(nameOf)
const times: string[] = []

beforeAll(async () => {
  await timed('server up', async () => {
    server = await startServer()
  })
  await createOwner(server)
  api = new Api(server.url, { token: await createToken(server, 'write') })
  await api.createOverlay({ name: 'Drill', slug: SLUG, pace: 'drill', disclosure: 'named', weights: 'unit' })
  const nodes = Tarnwick.length + Eelholm.length
  const { code } = await api.createJoiningCode(SLUG, { uses: nodes })
  stream = await api.follow(SLUG)
  await timed('fleet up', async () => {
    fleet = await FleetProcess.start({ ...overlay, collector: server.url, code })
  })
})
afterAll(async () => {
  stream?.close()
  await fleet?.stop()
  await server?.stop()
  process.stdout.write(`fleet drill: ${times.join(', ')}\n`)
})

describe('thirty-two agents in two offices, read by a program', () => {
  it('are read within 5 % of the exact value, with sides and crossing links right', async () => {
    const exact = await fleet.exact()
    expect([exact.nodes, exact.links]).toEqual([32, overlay.links.length])
    const reading = await timed('read from cold', () =>
      settledNear(exact.lambda2, {
        level: 'firm',
        coverage: { joined: 32, heard: 32, unheard: 0, linksKnown: 69, linksMeasured: 69 },
      }),
    )
    expect(reading.low).toBeLessThan(reading.lambda2 ?? 0)
    expect(reading.high).toBeGreaterThan(reading.lambda2 ?? 0)
    await eventually(async () => {
      const { items } = await api.nodes(SLUG)
      expect(items.map(({ state }) => state)).toEqual(items.map(() => 'heard'))
      const cut = await api.cut(SLUG)
      expectCut(cut, items)
      expect(cut.follows).toMatchObject({ key: 'harbour' })
      const { items: links } = await api.links(SLUG)
      expect(links.map(({ a, b }) => nameOf([a, b]))).toEqual(overlay.links.map(nameOf).sort())
    })
  })

  it('follow two crossing links that are cut', async () => {
    const before = await fleet.exact()
    const { links } = await api.cut(SLUG)
    for (const { a, b } of links.slice(1, 3)) {
      await fleet.tell(`cut ${a} ${b}`)
      across = across.filter((name) => name !== nameOf([a, b]))
    }
    const exact = await fleet.exact()
    expect(exact.links).toBe(67)
    expect(exact.lambda2).toBeLessThan(before.lambda2 * (1 - 2 * TOLERANCE))
    await timed('two links cut', () =>
      settledNear(exact.lambda2, {
        level: 'weak',
        coverage: { linksKnown: 67, linksMeasured: 67 },
        verdict: expect.stringContaining('parts 16 nodes from 16 and hangs on 3 links.'),
      }),
    )
    await eventually(async () => {
      expectCut(await api.cut(SLUG), (await api.nodes(SLUG)).items)
      const { items: events } = await api.events(SLUG)
      const lost = events.filter(({ kind }) => kind === 'link-lost').map(({ text }) => text)
      const gone = overlay.across.map(nameOf).filter((name) => !across.includes(name))
      expect(gone.filter((name) => !lost.join().includes(name))).toEqual([])
    })
  })

  it('are told of as split when one office falls silent, and never as better on the way', async () => {
    const from = stream.seen.length
    const since = new Date()
    const before = stream.seen.at(-1)
    const reading = await timed('a side silenced', () => silencedTogether())
    expect(reading).toMatchObject({ lambda2: null, low: null, high: null, data: 'unheard', level: 'split' })
    expect(reading.verdict).toBe('Treat as split. 16 nodes are unheard, all beyond the last weak cut.')
    expect(reading.detail).toContain('Eelholm fell silent together.')
    expect(reading.coverage).toMatchObject({ joined: 32, heard: 16, unheard: 16 })
    expect(reading.last?.lambda2).toBeGreaterThan(0)
    const levels = stream.seen.slice(from).map(({ level }) => level)
    expect(levels.filter((level) => rank(level) < rank(before?.level))).toEqual([])
    const { items: points } = await api.readings(SLUG, { from: since.toISOString(), step: '0.2' })
    expect(points.filter(({ level }) => rank(level) < rank(before?.level))).toEqual([])
    expect(points.at(-1)).toMatchObject({ lambda2: null, level: 'split', data: 'unheard' })
    await eventually(async () => {
      const { items } = await api.nodes(SLUG)
      expect(items.filter(({ state }) => state === 'unheard').map(({ name }) => name)).toEqual(Eelholm)
    })
  })

  it('are read within 5 % again when the office is heard again', async () => {
    await fleet.tellAll(Eelholm.map((name) => `heard ${name}`))
    const exact = await fleet.exact()
    await timed('heard again', () =>
      settledNear(exact.lambda2, {
        level: 'weak',
        treatAsSplit: false,
        coverage: { heard: 32, unheard: 0 },
      }),
    )
    await eventually(async () => expectCut(await api.cut(SLUG), (await api.nodes(SLUG)).items))
  })

  it('left no fault in the log of the server', () => {
    expect(server.failures()).toEqual([])
  })
})

/** The last of a few fresh readings in a row within 5 % of `exact`, the crossing links counted anew, that are as wanted. */
async function settledNear(exact: number, wanted: object): Promise<Reading> {
  let inARow = 0
  return stream.until(
    `${IN_A_ROW} fresh readings within 5 % of ${exact}, ${across.length} links crossing, ${JSON.stringify(wanted)}`,
    (reading) => {
      const { lambda2, data, crossingLinks } = reading
      const near = lambda2 !== null && Math.abs(lambda2 / exact - 1) < TOLERANCE
      const isSo = near && data === 'fresh' && crossingLinks === across.length && isLike(reading, wanted)
      inARow = isSo ? inARow + 1 : 0
      return inARow === IN_A_ROW
    },
    state,
  )
}

/**
 * The reading once the whole office has fallen silent together, as the collector has it: each agent soon after another.
 * Where this machine stood still between their last reports they did not, and where it did before them no single cut may
 * have stood out, so that there are no sides: then they fall silent anew.
 */
async function silencedTogether(): Promise<Reading> {
  for (;;) {
    await fleet.tellAll(Eelholm.map((name) => `silence ${name}`))
    const reading = await stream.until(
      '"treat as split" with the whole office unheard',
      ({ treatAsSplit, coverage }) => treatAsSplit && coverage.unheard === Eelholm.length,
      state,
    )
    const { items } = await api.nodes(SLUG)
    const lastMs = items.flatMap(({ name, heardAt }) =>
      heardAt !== null && Eelholm.includes(name) ? [Date.parse(heardAt)] : [],
    )
    lastMs.sort((a, b) => a - b)
    const apartMs = lastMs.slice(1).map((atMs, index) => atMs - (lastMs[index] ?? atMs))
    const isTogether = Math.max(...apartMs) < TOGETHER_INTERVALS * PACES.drill.intervalMs
    if (isTogether && reading.sides !== null) return reading
    await fleet.tellAll(Eelholm.map((name) => `heard ${name}`))
    await settledNear((await fleet.exact()).lambda2, {
      singleCut: true,
      coverage: { heard: 32, unheard: 0 },
    })
  }
}

function expectCut(cut: Cut, nodes: readonly OverlayNode[]): void {
  const [first, other] = nodes.find(({ name }) => name === Eelholm[0])?.side === 'a' ? ['a', 'b'] : ['b', 'a']
  const sides = nodes.map(({ name, side }) => `${name} ${side}`)
  expect(sides).toEqual([
    ...Eelholm.map((name) => `${name} ${first}`),
    ...Tarnwick.map((name) => `${name} ${other}`),
  ])
  expect(cut).toMatchObject({
    sides: [
      { name: 'a', nodes: 16 },
      { name: 'b', nodes: 16 },
    ],
    crossingLinks: across.length,
    crossingWeight: across.length,
  })
  expect(cut.links.map(({ a, b }) => nameOf([a, b]))).toEqual([...across].sort())
}

/** What the fleet says, for a failure. */
async function state(): Promise<string> {
  return `The fleet: ${JSON.stringify(await fleet.exact())}\n${inOneLine(await api.reading(SLUG))}`
}

function rank(level: Reading['level'] | undefined): number {
  return level ? LEVELS.indexOf(level) : -1
}

function nameOf([one, other]: readonly [string, string]): string {
  return [one, other].sort().join(' – ')
}

async function timed<T>(what: string, work: () => Promise<T>): Promise<T> {
  const startedMs = performance.now()
  const value = await work()
  times.push(`${what} ${((performance.now() - startedMs) / 1000).toFixed(1)} s`)
  return value
}
