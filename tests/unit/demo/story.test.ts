import { expect, test } from 'vitest'
import { FIRM_SECONDS, harbourlineStory } from '@/scripts/demo/story'
import { tellStory } from '@/scripts/demo/tell'
import { harbourline, isFar, LAST_LINKS } from '@/scripts/demo/topology'
import { exactOf } from '@/scripts/fleet/exact'
import { FakeClock } from '@/tests/support/fake-clock'

const scenario = harbourline()
const story = harbourlineStory(scenario)
const names = scenario.nodes.map(({ name }) => name)

/** What the fleet would make of the commands up to a time, from all links up. */
function stateAt(seconds: number) {
  const links = new Map(scenario.links.map(({ a, b }) => [`${a} ${b}`, 1]))
  const silent = new Set<string>()
  for (const { atSeconds, command } of story.steps) {
    if (atSeconds > seconds) break
    const [what = '', a = '', b = '', weight] = command.split(' ')
    const key = `${a} ${b}`
    if (what === 'silence') silent.add(a)
    else if (what === 'heard') silent.delete(a)
    else if (what === 'join') {
      if (links.has(key)) throw new Error(`linked already: ${command}`)
      links.set(key, 1)
    } else if (!links.has(key)) throw new Error(`not linked: ${command}`)
    else if (what === 'cut') links.delete(key)
    else if (what === 'weaken') links.set(key, Number(weight))
    else throw new Error(`unknown: ${command}`)
  }
  const list = [...links].map(([key, weight]) => {
    const [a = '', b = ''] = key.split(' ')
    return { a, b, weight }
  })
  return { exact: exactOf(names, list), silent, links }
}

test('a loop begins with at least four minutes in which nothing happens', () => {
  expect(FIRM_SECONDS).toBeGreaterThanOrEqual(240)
  expect(story.steps[0]?.atSeconds).toBe(FIRM_SECONDS)
  expect(stateAt(FIRM_SECONDS - 1).exact.lambda2).toBeCloseTo(2.008, 3)
})

test('steps are in the order of their times and end well before the loop does', () => {
  const times = story.steps.map(({ atSeconds }) => atSeconds)
  expect(times).toEqual([...times].sort((a, b) => a - b))
  expect(times[times.length - 1]).toBeLessThanOrEqual(story.loopSeconds - 30)
})

test('each step of the thinning leaves the overlay in one piece and no better off', () => {
  let before = Number.POSITIVE_INFINITY
  for (const { atSeconds, command } of story.steps) {
    if (command.startsWith('silence')) break
    const now = stateAt(atSeconds).exact.lambda2!
    expect(now).toBeGreaterThan(0.2)
    expect(now).toBeLessThanOrEqual(before + 1e-9)
    before = now
  }
  expect(before).toBeCloseTo(0.2185, 4)
})

test('half a minute before the silence three links across are left', () => {
  const { links, silent } = stateAt(550)
  const across = scenario.links.filter(({ a, b, across }) => across && links.has(`${a} ${b}`))
  expect(across.map(({ a, b }) => ({ a, b, weight: links.get(`${a} ${b}`) }))).toEqual(LAST_LINKS)
  expect(silent.size).toBe(0)
})

test('the far side is silent for forty seconds, and no one else', () => {
  expect([...stateAt(586).silent]).toEqual(scenario.nodes.filter(isFar).map(({ name }) => name))
  expect(stateAt(624).silent.size).toBe(18)
  expect(stateAt(625).silent.size).toBe(0)
})

test('at the end of a loop everything is as at its beginning', () => {
  const { links, silent } = stateAt(story.loopSeconds)
  expect(silent.size).toBe(0)
  expect(links.size).toBe(scenario.links.length)
  expect([...links.values()].every((weight) => weight === 1)).toBe(true)
})

test('the story is told over and over at its times, until the signal aborts', async () => {
  const clock = new FakeClock()
  const startedAtMs = clock.monotonicMs()
  const stopping = new AbortController()
  const told: [number, string][] = []
  const telling = tellStory(
    {
      clock,
      obey: async (command) => {
        told.push([(clock.monotonicMs() - startedAtMs) / 1000, command])
        return { ok: command !== 'cut a b' }
      },
      onStep: () => {},
    },
    {
      loopSeconds: 100,
      steps: [
        { atSeconds: 10, command: 'cut a b' },
        { atSeconds: 20.5, command: 'join a b' },
      ],
    },
    stopping.signal,
  )
  await clock.advance(150_000)
  expect(told).toEqual([
    [10, 'cut a b'],
    [20.5, 'join a b'],
    [110, 'cut a b'],
    [120.5, 'join a b'],
  ])
  stopping.abort()
  await telling
})

test('a command that takes long puts off the next one, and not the loop after it', async () => {
  const clock = new FakeClock()
  const stopping = new AbortController()
  const heard: number[] = []
  const telling = tellStory(
    {
      clock,
      obey: (command) =>
        new Promise((resolve) => clock.after(command === 'slow' ? 15_000 : 0, () => resolve({ ok: true }))),
      onStep: (atSeconds) => heard.push(atSeconds),
    },
    {
      loopSeconds: 30,
      steps: [
        { atSeconds: 10, command: 'slow' },
        { atSeconds: 12, command: 'quick' },
      ],
    },
    stopping.signal,
  )
  await clock.advance(59_000)
  expect(heard).toEqual([25, 25, 55, 55])
  stopping.abort()
  await telling
})
