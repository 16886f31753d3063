import { expect, test } from 'vitest'
import { fuzzIntake } from '../support/fuzzed-intake'
import { FuzzedLink, heapBytes } from '../support/fuzzed-link'
import { testOverlay } from '../support/passes'

const MESSAGES = Number(process.env.THINSPAN_FUZZ_MESSAGES ?? 120_000)
/** What is allocated once, caches and the attackers' own sockets included, is there after this share of the run. */
const WARM_UP = 0.2
const MOST_GROWTH_BYTES = 8 * 1024 * 1024

test(`${MESSAGES} random and mutated messages: no crash, a flat heap, an honest link that stays up`, {
  timeout: 3_600_000,
}, async () => {
  const overlay = testOverlay()
  const world = new FuzzedLink(
    overlay,
    await overlay.identity('gul-04'),
    await overlay.identity('tar-01'),
    'long',
  )
  await world.start()
  await world.attack(MESSAGES * WARM_UP)
  const before = await heapBytes()
  await world.attack(MESSAGES * (1 - WARM_UP))
  const after = await heapBytes()
  const { victim, honest } = await world.settle()
  const { count } = world
  process.stdout.write(
    `${JSON.stringify({ ...count, closes: Object.fromEntries(count.closes) })}\n` +
      `heap ${(before / 2 ** 20).toFixed(1)} MiB, then ${(after / 2 ** 20).toFixed(1)} MiB\n` +
      `walkers over the honest link: ${JSON.stringify(victim.link)}\n`,
  )
  expect(after - before).toBeLessThan(MOST_GROWTH_BYTES)
  for (const [end, other] of [
    [world.victim, 'tar-01'],
    [world.honest, 'gul-04'],
  ] as const) {
    expect(end.events.filter(({ kind, peer }) => kind === 'link-down' && peer === other)).toEqual([])
  }
  expect(honest.link.map(({ sent }) => sent)).toEqual(victim.link.map(({ received }) => received))
  expect([...victim.missing, ...honest.missing].every((missing) => missing === 0)).toBe(true)
  expect(count.messages).toBeGreaterThanOrEqual(MESSAGES)
  await world.stop()
})

test('200,000 more straight at what reads them, where none ends a connection: no crash, a flat heap', {
  timeout: 3_600_000,
}, async () => {
  const overlay = testOverlay()
  fuzzIntake(overlay, 'warm', 20_000)
  const before = await heapBytes()
  const outcomes = fuzzIntake(overlay, 'straight', 200_000)
  const after = await heapBytes()
  process.stdout.write(
    `${JSON.stringify(Object.fromEntries(outcomes))}\nheap ${(before / 2 ** 20).toFixed(1)} MiB, then ${(after / 2 ** 20).toFixed(1)} MiB\n`,
  )
  expect(after - before).toBeLessThan(MOST_GROWTH_BYTES)
  expect(outcomes.get('bad-frame')).toBeGreaterThan(50_000)
})
