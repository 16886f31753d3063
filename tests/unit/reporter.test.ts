import { randomBytes } from 'node:crypto'
import { expect, test } from 'vitest'
import { enrol } from '@/agent'
import { Reporter } from '@/agent/collector/reporter'
import { createRandom } from '@/lib/method/random'
import { generateKeys } from '@/lib/protocol'
import { FakeClock } from '../support/fake-clock'
import { TestCollector } from '../support/test-collector'

const HOUR_MS = 3_600_000
const never = new AbortController().signal

/** A reporter whose wall clock is wrong by what a test says, and steps when it says another. */
async function reporterOn(offsetMs: number) {
  const clock = new FakeClock({ epochMs: Date.UTC(2031, 4, 6, 12) })
  const collector = new TestCollector({ clock, random: createRandom('reporter') })
  const keys = generateKeys()
  const joining = { code: collector.code, name: 'tar-01', labels: {}, address: null, version: '0.0.0-test' }
  const enrolled = await enrol({ collector, keys }, joining, never)
  if (!enrolled.ok) throw new Error('not enrolled')
  const wall = { offsetMs }
  const own = {
    monotonicMs: () => clock.monotonicMs(),
    epochMs: () => clock.epochMs() + wall.offsetMs,
    after: (ms: number, run: () => void) => clock.after(ms, run),
  }
  const reporter = new Reporter(
    { client: collector, clock: own, keys, randomBytes },
    { agentId: enrolled.value.agentId, onPass: () => {}, onSession: () => {} },
  )
  return { clock, reporter, wall }
}

test('until a session is opened the time is the own clock’s', async () => {
  const { clock, reporter } = await reporterOn(HOUR_MS)
  expect(reporter.nowMs()).toBe(clock.epochMs() + HOUR_MS)
  expect(reporter.skewMs).toBe(0)
})

test.each([0, -60_000, 2 * HOUR_MS])(
  'a step of a wall clock that was %d ms off does not move the collector’s time',
  async (offsetMs) => {
    const { clock, reporter, wall } = await reporterOn(offsetMs)
    expect(await reporter.check(never)).toEqual({ ok: true, value: null })
    expect(reporter.nowMs()).toBe(clock.epochMs())
    expect(reporter.skewMs).toBe(0 - offsetMs)
    wall.offsetMs = offsetMs + HOUR_MS
    await clock.advance(1_000)
    expect(reporter.nowMs()).toBe(clock.epochMs())
    expect(reporter.skewMs).toBe(-offsetMs - HOUR_MS)
  },
)
