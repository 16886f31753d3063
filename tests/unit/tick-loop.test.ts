import { expect, test } from 'vitest'
import { TICK_JITTER, TickLoop } from '@/agent/tick-loop'
import { createRandom } from '@/lib/method/random'
import { FakeClock } from '../support/fake-clock'

const loopOn = (clock: FakeClock, tickMs: () => number, tick: () => void) =>
  new TickLoop({ clock, random: createRandom('ticks') }, { tickMs, tick })

test('ticks come at the pace’s rate, never quite evenly', async () => {
  const clock = new FakeClock()
  const at: number[] = []
  const loop = loopOn(
    clock,
    () => 20,
    () => at.push(clock.monotonicMs()),
  )
  loop.start()
  await clock.advance(20_000)
  loop.stop()
  expect(Math.abs(at.length - 1_000)).toBeLessThan(20)
  const gaps = at.slice(1).map((ms, index) => ms - at[index]!)
  expect(Math.min(...gaps)).toBeGreaterThanOrEqual(20 * (1 - TICK_JITTER / 2))
  expect(Math.max(...gaps)).toBeLessThanOrEqual(20 * (1 + TICK_JITTER / 2))
  expect(new Set(gaps).size).toBeGreaterThan(900)
  expect(loop.counts).toEqual({ count: at.length, late: 0 })
})

test('a new pace holds from the next tick', async () => {
  const clock = new FakeClock()
  let tickMs = 20
  let ticks = 0
  const loop = loopOn(
    clock,
    () => tickMs,
    () => (ticks += 1),
  )
  loop.start()
  await clock.advance(1_000)
  tickMs = 200
  ticks = 0
  await clock.advance(10_000)
  loop.stop()
  expect(Math.abs(ticks - 50)).toBeLessThan(4)
})

test('ticks missed while the program stood still are counted late and not made up for', async () => {
  const clock = new FakeClock()
  let ticks = 0
  const stalls = { after: 10, ms: 1_000 }
  // A program that stands still sees its timers fire late: the clock has moved on meanwhile.
  const stalling = {
    monotonicMs: () => clock.monotonicMs() + (ticks > stalls.after ? stalls.ms : 0),
    epochMs: () => clock.epochMs(),
    after: (ms: number, run: () => void) => clock.after(ms, run),
  }
  const loop = new TickLoop(
    { clock: stalling, random: createRandom('stall') },
    { tickMs: () => 20, tick: () => (ticks += 1) },
  )
  loop.start()
  await clock.advance(2_000)
  loop.stop()
  expect(Math.abs(ticks - 100)).toBeLessThan(6)
  expect(loop.counts.late).toBe(1)
})

test('after a stop there are no ticks', async () => {
  const clock = new FakeClock()
  let ticks = 0
  const loop = loopOn(
    clock,
    () => 20,
    () => (ticks += 1),
  )
  loop.start()
  loop.stop()
  await clock.advance(1_000)
  expect(ticks).toBe(0)
})
