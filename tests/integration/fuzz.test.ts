import { expect, test } from 'vitest'
import { FuzzedLink } from '../support/fuzzed-link'
import { testOverlay } from '../support/passes'

const MESSAGES = 3_000
/** How the agent must have ended connections, each at least once. */
const MEANT = ['bad-frame', 'not-a-hello', 'proof-wrong', 'too-large', 'counter-fell', 'orders-forged']

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
  // What is rare may not have come yet: how the lanes take turns is chance.
  const isMissed = () => MEANT.some((name) => !world.count.closes.has(name))
  for (let more = 0; more < 10 && isMissed(); more++) await world.attack(MESSAGES / 3)
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
  expect([...closes.keys()]).toEqual(expect.arrayContaining(MEANT))
  await world.stop()
})
