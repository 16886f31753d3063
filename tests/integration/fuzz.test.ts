import { expect, test } from 'vitest'
import { FuzzedLink } from '../support/fuzzed-link'
import { testOverlay } from '../support/passes'

const MESSAGES = 3_000

test(`${MESSAGES} random and mutated messages at an agent: it lives, its honest link stays up, no walker is lost there`, async () => {
  const overlay = testOverlay()
  const world = new FuzzedLink(
    overlay,
    await overlay.identity('gul-04'),
    await overlay.identity('tar-01'),
    'short',
  )
  await world.start()
  await world.attack(MESSAGES)
  const { victim, honest } = await world.settle()
  for (const end of [world.victim, world.honest]) {
    const about = end === world.victim ? 'tar-01' : 'gul-04'
    expect(end.events.filter(({ kind, peer }) => kind === 'link-down' && peer === about)).toEqual([])
  }
  expect(honest.link.map(({ sent }) => sent)).toEqual(victim.link.map(({ received }) => received))
  // How many cross depends on how long the attack takes; that some did makes the balance above mean something.
  expect(victim.link.every(({ sent, received }) => sent > 0 && received > 0)).toBe(true)
  expect([...victim.missing, ...honest.missing].every((missing) => missing === 0)).toBe(true)
  // The attack must have reached what it is meant for.
  const { closes, links, handshakes, read } = world.count
  expect([links > 50, handshakes > 50, read > 500]).toEqual([true, true, true])
  for (const name of [
    'bad-frame',
    'not-a-hello',
    'proof-wrong',
    'too-large',
    'counter-fell',
    'orders-forged',
  ])
    expect([name, closes.get(name) ?? 0]).toEqual([name, expect.toSatisfy((times: number) => times > 0)])
  await world.stop()
})
