import { expect, test } from 'vitest'
import { AuditedOverlay } from '../support/audited-overlay'
import { testOverlay } from '../support/passes'

const PAIRS = [
  [0, 1],
  [1, 2],
  [2, 3],
  [3, 0],
  [0, 2],
  [1, 3],
] as const
/** Two of six links: one by the node's own view, the other by its sockets. */
const [VIEWED, BROKEN] = [PAIRS[4], PAIRS[5]]

test('a third of the links flapping 20 times a second, on lossy ways: walkers are neither lost nor made', {
  timeout: 60_000,
}, async () => {
  const overlay = testOverlay()
  const names = ['tar-01', 'gul-04', 'pin-02', 'eel-09']
  const identities = await Promise.all(names.map((name) => overlay.identity(name)))
  const world = new AuditedOverlay(identities, overlay, 77)
  await world.start()
  for (const [a, b] of PAIRS) world.dial(a, b)
  world.order(
    (orders, sequence) => ({
      ...orders,
      sequence,
      colonies: [
        {
          colony: 0,
          seeding: 1,
          salt: 3,
          placing: true,
          placeX: 200,
          placeY: 200,
          encounterRate: 0.002,
          birthRateX: 0.02,
          birthRateY: 0.02,
          refused: [],
        },
      ],
    }),
    () => true,
  )
  await world.clock.advance(500)
  world.setWeather({ loss: 0.3, repeat: 0.1, delayMs: 60 })
  for (let flap = 0; flap < 120; flap++) {
    const isUp = flap % 2 === 0
    for (const [a, b] of [VIEWED, [VIEWED[1], VIEWED[0]] as const]) world.setQuality(a, b, isUp ? 1 : 0.2)
    if (isUp) world.cutSockets(BROKEN[0], BROKEN[1])
    await world.clock.advance(50)
    const { held, inFlight, lost, made } = world.audit(0, 1)
    expect(held + inFlight + lost).toBe(made)
    expect(lost).toBe(0)
  }
  expect(world.crossed).toBeGreaterThan(1_000)
  expect(world.refusals).toEqual([])
})
