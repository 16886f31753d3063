import { beforeAll, expect, test } from 'vitest'
import { readingSchema } from '@/lib/data/dto'
import { createRandom } from '@/lib/method/random'
import { type History, layOutHistory, phaseAt, slotsBefore } from '@/scripts/demo/history'
import { changesOf, PHASES, type Phase, type Sample, simulatePhases } from '@/scripts/demo/phases'
import { harbourline } from '@/scripts/demo/topology'
import { exactOf } from '@/scripts/fleet/exact'

const scenario = harbourline()
const NOW_MS = Date.UTC(2026, 11, 9, 14, 23, 7)
const END_MS = NOW_MS - 5_000
const DAY_MS = 24 * 3_600_000
let samples: Record<Phase, Sample[]>
let history: History

beforeAll(async () => {
  const random = createRandom('history test')
  samples = await simulatePhases({ random, breathe: async () => {} }, scenario, new AbortController().signal)
  history = layOutHistory(samples, random, NOW_MS)
}, 60_000)

function exact(phase: Phase): number {
  const changed = new Map(changesOf(scenario, phase).map(({ a, b, weight }) => [`${a} ${b}`, weight]))
  const links = scenario.links.map(({ a, b }) => ({ a, b, weight: changed.get(`${a} ${b}`) ?? 1 }))
  return exactOf(
    scenario.nodes.map(({ name }) => name),
    links,
  ).lambda2!
}

// In the ebb λ₃ is 5.3 % over λ₂, and walkers that were set in that mode may stand there for a minute.
test.each(PHASES)('simulated readings of the phase "%s" are within 7 %% of its exact value', (phase) => {
  expect(samples[phase].length).toBeGreaterThanOrEqual(5)
  const truth = exact(phase)
  for (const { estimate } of samples[phase])
    expect(Math.abs(estimate.lambda2! / truth - 1), `${estimate.lambda2} of ${truth}`).toBeLessThan(0.07)
})

test('each phase reads worse than the one before', () => {
  const values = PHASES.map((phase) => exact(phase))
  expect(values).toEqual([...values].sort((a, b) => b - a))
})

test('readings go back eight days, in order, the last eleven seconds ago', () => {
  const times = history.readings.map(({ at }) => Date.parse(at))
  expect(times[0]).toBe(END_MS - 8 * DAY_MS)
  expect(times).toEqual([...new Set(times)].sort((a, b) => a - b))
  expect(NOW_MS - times[times.length - 1]!).toBe(11_000)
  expect(times.length).toBeLessThan(2000)
})

test('every reading is one the pages can show, and is marked as demo', () => {
  for (const reading of history.readings) expect(readingSchema.parse(reading).demo).toBe(true)
})

test('what is usual is known after seven days and not before', () => {
  const whole = exact('whole')
  const usual = (fromMs: number, toMs: number) =>
    history.readings.filter(({ at }) => Date.parse(at) >= fromMs && Date.parse(at) < toMs)
  const startMs = END_MS - 8 * DAY_MS
  const early = usual(startMs, startMs + 6.9 * DAY_MS)
  expect(early.filter((reading) => reading.usual !== null)).toEqual([])
  const off = (reading: { usual: number | null }) => Math.abs(reading.usual! / whole - 1)
  const late = usual(startMs + 7.1 * DAY_MS, NOW_MS)
  expect(late.length).toBeGreaterThan(100)
  expect(late.filter((reading) => !(off(reading) < 0.05))).toEqual([])
})

test('at its thinnest, three days ago, the overlay was weak on three links along the label harbour', () => {
  const atMs = END_MS - 71.5 * 3_600_000
  const reading = history.readings.find(({ at }) => Date.parse(at) >= atMs)!
  expect(reading).toMatchObject({
    level: 'weak',
    crossingLinks: 3,
    sides: [
      { name: 'a', nodes: 18 },
      { name: 'b', nodes: 18 },
    ],
  })
  expect(reading.detail).toContain('It follows the label harbour')
})

test('the level goes to weak and back twice, and the last reading is firm', () => {
  expect(history.events.map(({ kind, text }) => `${kind}: ${text}`)).toEqual([
    'level-changed: First judged firm',
    'level-changed: From firm to weak',
    'level-changed: From weak to firm',
    'level-changed: From firm to weak',
    'level-changed: From weak to firm',
  ])
  expect(history.readings[history.readings.length - 1]?.level).toBe('firm')
})

test('the last hours are whole, whatever the tide', () => {
  for (const hours of [0, 0.5, 1, 2, 2.9]) expect(phaseAt(hours)).toBe('whole')
  expect(phaseAt(13)).toBe('thin')
  const phases = new Set(slotsBefore(NOW_MS).map(({ phase }) => phase))
  expect([...phases].sort()).toEqual([...PHASES].sort())
})
