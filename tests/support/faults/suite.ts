/** What links, clocks, processes and disks do to an overlay, and what must come of it: readings right, no walker lost or made. */
import { join } from 'node:path'
import { afterAll, beforeAll, describe, expect, it } from 'vitest'
import { createClock, createSpoolFile } from '@/agent'
import { createRandom } from '@/lib/method/random'
import { MESSAGE_KIND } from '@/lib/protocol'
import { until } from '../until'
import { type Books, missing } from '../walker-books'
import { AgentProcess } from './agent-process'
import { FaultOverlay } from './fault-overlay'
import { FlakyProxy } from './flaky-proxy'
import { FullDisk } from './full-disk'
import { faithfully, type Meddling, MeddlingRelay } from './meddling-relay'

const HOUR_MS = 3_600_000
const FLAP_MS = 50
const VICTIM = 'eel-05'
const STEPPED = 'tar-05'
const SPOOLING = 'tar-01'
const FLAPPING = ['eel-01', 'tar-01'] as const
const MEDDLED = ['eel-03', 'tar-03'] as const
const DIALED_TWICE = ['tar-02', 'tar-04'] as const

export interface FaultSuiteInit {
  /** How long each fault of a link or clock lasts. */
  faultMs: number
  /** How long the agent is stopped, one after the other. */
  stopsMs: readonly number[]
}

let steppedByMs = 0
const steppingClock = createClock({
  monotonicMs: () => performance.now(),
  epochMs: () => Date.now() + steppedByMs,
})
const random = createRandom('faults')
const disk = new FullDisk()
if (disk.why !== null) process.stdout.write(`The full disk is left out: ${disk.why}.\n`)
const overlay = new FaultOverlay({
  seed: 'faults',
  elsewhere: [VICTIM],
  clockOf: (name) => (name === STEPPED ? steppingClock : null),
  initOf: (name) => (name === SPOOLING ? { spool: createSpoolFile(join(disk.folder, 'spool')) } : {}),
})
let victim: AgentProcess
let flaky: FlakyProxy
let relay: MeddlingRelay

export function faultSuite({ faultMs, stopsMs }: FaultSuiteInit): void {
  beforeAll(async () => {
    await overlay.start()
    const { url: collector } = overlay
    victim = new AgentProcess({ name: VICTIM, collector, code: overlay.collector.code })
    await victim.enrol()
    overlay.noteAddress(VICTIM, victim.address)
    victim.run()
    flaky = new FlakyProxy({ targetPort: overlay.portOf(FLAPPING[1]) })
    relay = new MeddlingRelay({ target: overlay.addressOf(MEDDLED[1]) })
    const through = { [FLAPPING.join()]: await flaky.start(), [MEDDLED.join()]: await relay.start() }
    overlay.link((a, b) => (isPair(a, b, DIALED_TWICE) ? null : through[`${a},${b}`]))
    const [one, other] = DIALED_TWICE
    for (const [from, to] of [
      [one, other],
      [other, one],
    ] as const) {
      const agentId = `agent-${to}`
      overlay.member(from).agent?.addNeighbour({ agentId, address: overlay.addressOf(to) })
    }
  })
  afterAll(async () => {
    await victim?.stop()
    await overlay.stop()
    await flaky?.stop()
    await relay?.stop()
    disk.remove()
  })

  describe('an overlay of ten agents over real sockets', () => {
    it('is read within 5 % where two ends dial each other at once, over one link and with balanced books', async () => {
      await overlay.reads()
      const [one, other] = DIALED_TWICE
      await until(() => overlay.isLinked(one, other) && overlay.isLinked(other, one))
      const status = overlay.member(one).agent?.status().links ?? []
      expect(status.filter(({ peer }) => peer === `agent-${other}`)).toHaveLength(1)
      expect(overlay.isLinked(one, other) && overlay.isLinked(other, one)).toBe(true)
      await expectBalanced()
    })

    it('loses no walker on a link that breaks twenty times a second, and is read as before when it holds', async () => {
      const flapping = setInterval(() => {
        flaky.isDown = !flaky.isDown
        if (flaky.isDown) flaky.cut()
      }, FLAP_MS / 2)
      await delay(faultMs)
      // Whoever dials waits longer from one failure to the next, so most of the flapping meets no connection.
      await until(() => flaky.cuts > 1)
      clearInterval(flapping)
      flaky.isDown = false
      await overlay.reads()
      await until(() => overlay.isLinked(...FLAPPING))
      await expectBalanced()
    })

    it('keeps a link whose frames are late, overtaken, repeated and lost, and loses no walker on it', async () => {
      const downs = downsOf(MEDDLED)
      // So many that more go on than come, whichever are late.
      const MANY = 100
      const from = relay.came
      await meddle(
        faultMs,
        (bytes) => {
          if (random.uniform() < 0.1) return []
          const copies = random.uniform() < 0.3 ? 3 : 1
          return Array.from({ length: copies }, () => ({ bytes, delayMs: 200 * random.uniform() }))
        },
        () => relay.came >= from + MANY && relay.went > relay.came,
      )
      expect(relay.went).toBeGreaterThan(relay.came)
      expect(downsOf(MEDDLED)).toEqual(downs)
      await overlay.reads()
      await expectBalanced()
    })

    it('closes a link on frames that are cut short, dials it again, and loses no walker', async () => {
      const before = downsOf(MEDDLED).length
      const reasonsSince = () => downsOf(MEDDLED).slice(before)
      await meddle(
        faultMs,
        (bytes) => {
          const isCut = random.uniform() < 0.05
          return [{ bytes: isCut ? bytes.subarray(0, bytes.length >> 1) : bytes, delayMs: 0 }]
        },
        () => reasonsSince().length > 0,
      )
      const reasons = reasonsSince()
      expect(reasons.filter((reason) => reason !== 'bad-frame')).toEqual([])
      await overlay.reads()
      await until(() => overlay.isLinked(...MEDDLED))
      await expectBalanced()
    })

    it('goes on undisturbed when an agent’s wall clock is set an hour ahead, and back', async () => {
      const { agent } = overlay.member(STEPPED)
      const failed = agent?.status().reports.failed
      const events = overlay.events.length
      steppedByMs = HOUR_MS
      await delay(faultMs / 2)
      steppedByMs = -HOUR_MS
      await delay(faultMs / 2)
      steppedByMs = 0
      expect(agent?.status().reports.failed).toBe(failed)
      expect(overlay.events.slice(events)).toEqual([])
      await overlay.reads()
      await expectBalanced()
    })

    it.skipIf(disk.why !== null)(
      'goes on where the disk for a spool is full, says so, and tells of the time away',
      async () => {
        disk.fill()
        const seedings = overlay.collector.estimate?.seedings ?? []
        overlay.collector.isAway = true
        await delay(faultMs)
        const reading = overlay.reads()
        overlay.collector.isAway = false
        await until(() => overlay.collector.away.some(({ agentId }) => agentId === `agent-${SPOOLING}`))
        await until(() => overlay.lastErrorOf(SPOOLING)?.includes('ENOSPC') ?? false)
        const first = await reading
        // One colony may have been due for its renewal.
        expect(seedings.filter((seeding) => first.includes(seeding)).length).toBeGreaterThanOrEqual(4)
        await expectBalanced()
      },
    )

    it.each(stopsMs)(
      'takes an agent that stood still for %i ms back as it was, with every walker',
      async (stopMs) => {
        const before = incarnationOf(VICTIM)
        victim.signal('SIGSTOP')
        await delay(stopMs)
        victim.signal('SIGCONT')
        await overlay.reads()
        expect(incarnationOf(VICTIM)).toBe(before)
        await expectBalanced()
      },
    )

    it('loses what a killed agent held and nothing else, and is read as before after its restart', async () => {
      const before = incarnationOf(VICTIM)
      const events = overlay.events.length
      await overlay.standStill()
      const held = new Map(overlay.booksOf(VICTIM).map(({ slot, held }) => [slot, held]))
      const made = new Map(overlay.booksOf(VICTIM).map(({ slot, made }) => [slot, made]))
      expect([...held.values()].some((count) => count > 0)).toBe(true)
      victim.signal('SIGKILL')
      expect(await victim.ended()).toBe('ended with SIGKILL')
      victim.run()
      const isUpAgain = () => overlay.events.slice(events).filter(isVictimUp).length >= 4
      await until(() => incarnationOf(VICTIM) !== before && isUpAgain())
      // Not before: what neighbours send before they notice is lost as well, and nobody could say here how much.
      overlay.walkOn()
      await overlay.reads()
      const books = (await overlay.standStill()).filter(({ slot }) => held.has(slot))
      overlay.walkOn()
      // Colonies are seeded anew, one at a time; what is left of those of before is looked at.
      expect(books.length).toBeGreaterThan(0)
      expect(books.map((book) => book.made + (made.get(book.slot) ?? 0) - book.held)).toEqual(
        books.map(({ slot }) => held.get(slot)),
      )
    })
  })
}

/** For so long, and until it has had its effect. */
async function meddle(forMs: number, meddling: Meddling, hasTold: () => boolean): Promise<void> {
  relay.meddling = (bytes) => (bytes[0] === MESSAGE_KIND.frame ? meddling(bytes) : faithfully(bytes))
  await delay(forMs)
  await until(hasTold)
  relay.meddling = faithfully
}

async function expectBalanced(): Promise<void> {
  expect([...overlay.accusations]).toEqual([])
  const books = await overlay.standStill()
  overlay.walkOn()
  expect(books.length).toBeGreaterThanOrEqual(5)
  expect(books.map(withoutFault)).toEqual(books.map(({ slot, held }) => ({ slot, missing: 0, made: held })))
}

function withoutFault(book: Books) {
  return { slot: book.slot, missing: missing(book), made: book.made }
}

function downsOf([one, other]: readonly [string, string]): string[] {
  return overlay.events
    .filter(({ at, kind, peer }) => kind === 'link-down' && at === one && peer === `agent-${other}`)
    .map(({ reason }) => reason)
}

function isVictimUp({ kind, peer }: { kind: string; peer: string }): boolean {
  return kind === 'link-up' && peer === `agent-${VICTIM}`
}

function incarnationOf(name: string): string | undefined {
  return overlay.collector.agents.get(`agent-${name}`)?.last?.report.incarnation
}

function isPair(a: string, b: string, pair: readonly string[]): boolean {
  return pair.includes(a) && pair.includes(b)
}

const delay = (ms: number): Promise<void> => new Promise((resolve) => setTimeout(resolve, ms))
