import fc from 'fast-check'
import { expect, test } from 'vitest'
import type { ColonyOrders } from '@/lib/method/orders'
import { AuditedOverlay } from '../support/audited-overlay'
import { testOverlay } from '../support/passes'

/** Histories in the ordinary run; more in a soak. */
const RUNS = Number(process.env.THINSPAN_AUDIT_RUNS ?? 40)
const COUNT = 4
const RING = [0, 1, 2, 3].map((at) => [at, (at + 1) % COUNT] as const)
const overlay = testOverlay()
const identities = await Promise.all(
  ['tar-01', 'gul-04', 'pin-02', 'eel-09'].map((agentId) => overlay.identity(agentId)),
)

const index = fc.nat({ max: COUNT - 1 })
const share = fc.integer({ min: 0, max: 8 }).map((tenths) => tenths / 10)
const step = fc.oneof(
  fc.record({
    kind: fc.constant('weather' as const),
    loss: share,
    repeat: share,
    delayMs: fc.nat({ max: 400 }),
  }),
  fc.record({ kind: fc.constant('cut-sockets' as const), a: index, b: index }),
  fc.record({ kind: fc.constant('dial' as const), a: index, b: index }),
  fc.record({ kind: fc.constant('restart' as const), a: index }),
  fc.record({ kind: fc.constant('reseed' as const), colony: fc.nat({ max: 1 }), hears: fc.nat({ max: 15 }) }),
  fc.record({
    kind: fc.constant('rates' as const),
    birth: fc.integer({ min: -5, max: 5 }),
    hears: fc.nat({ max: 15 }),
  }),
  fc.record({ kind: fc.constant('remove' as const), a: index, b: index, both: fc.boolean() }),
  fc.record({ kind: fc.constant('wait' as const), ms: fc.constantFrom(500, 1_000, 2_000, 10_500) }),
)
type Step = typeof step extends fc.Arbitrary<infer T> ? T : never

test('walkers are neither lost nor made, whatever happens to links, processes and seedings', {
  timeout: Math.max(60_000, RUNS * 1_000),
}, async () => {
  const seen = { crossed: 0, lost: 0, inFlight: 0, removals: 0, restarts: 0, histories: 0 }
  await fc.assert(
    fc.asyncProperty(
      fc.array(fc.tuple(step, fc.integer({ min: 1, max: 120 })), { minLength: 5, maxLength: 40 }),
      fc.integer(),
      async (history, seed) => {
        const world = new AuditedOverlay(identities, overlay, seed)
        await world.start()
        for (const [a, b] of RING) world.dial(a, b)
        for (const colony of [0, 1]) reseed(world, colony, 15)
        await world.clock.advance(200)
        for (const [action, ms] of history) {
          await apply(world, action)
          check(world)
          await world.clock.advance(action.kind === 'wait' ? action.ms : ms)
          check(world)
          if (action.kind === 'restart') seen.restarts += 1
          if (action.kind === 'remove') seen.removals += 1
        }
        for (const { colony, seeding } of world.newest) {
          const { lost, inFlight } = world.audit(colony, seeding)
          seen.lost += lost
          seen.inFlight += inFlight
        }
        await calm(world)
        seen.crossed += world.crossed
        seen.histories += 1
        expect(world.refusals).toEqual([])
      },
    ),
    { numRuns: RUNS },
  )
  // The histories must have done something, or the audit shows nothing.
  expect(seen.crossed / seen.histories).toBeGreaterThan(500)
  expect(seen.lost).toBeGreaterThan(100)
  expect(seen.inFlight).toBeGreaterThan(100)
  expect(seen.restarts).toBeGreaterThan(20)
  expect(seen.removals).toBeGreaterThan(20)
})

/** The identity, exact, for every colony's newest seeding. */
function check(world: AuditedOverlay): void {
  for (const { colony, seeding } of world.newest) {
    const { held, inFlight, lost, made } = world.audit(colony, seeding)
    expect(held + inFlight + lost).toBe(made)
  }
}

/** Fair weather, all links back, no more walking: then all that was on its way must arrive. */
async function calm(world: AuditedOverlay): Promise<void> {
  world.setWeather({ loss: 0, repeat: 0, delayMs: 5 })
  world.order(
    (orders, sequence) => ({ ...orders, sequence, linkTimePerSecond: 0 }),
    () => true,
  )
  for (const [a, b] of RING) {
    world.dial(a, b)
    world.dial(b, a)
  }
  for (const [a, b] of [
    [0, 2],
    [1, 3],
  ] as const) {
    world.dial(a, b)
    world.dial(b, a)
  }
  await world.clock.advance(3_000)
  check(world)
  for (let a = 0; a < COUNT; a++) {
    for (let b = 0; b < COUNT; b++) if (a !== b) expect(world.isLinked(a, b)).toBe(true)
  }
  for (const { colony, seeding } of world.newest) {
    expect(world.audit(colony, seeding)).toMatchObject({ inFlight: 0 })
  }
}

async function apply(world: AuditedOverlay, action: Step): Promise<void> {
  switch (action.kind) {
    case 'weather':
      world.setWeather(action)
      break
    case 'cut-sockets':
      world.cutSockets(action.a, action.b)
      break
    case 'dial':
      if (action.a !== action.b) world.dial(action.a, action.b)
      break
    case 'restart':
      await world.restart(action.a, [(action.a + 1) % COUNT, (action.a + 3) % COUNT])
      break
    case 'reseed':
      reseed(world, action.colony, action.hears)
      break
    case 'rates':
      world.order(
        (orders, sequence) => ({
          ...orders,
          sequence,
          colonies: orders.colonies.map((colony) => ({
            ...colony,
            birthRateX: action.birth / 100,
            birthRateY: action.birth / 80,
          })),
        }),
        (agent) => (action.hears & (1 << agent)) !== 0,
      )
      break
    case 'remove':
      if (action.a === action.b) break
      world.remove(action.a, action.b)
      if (action.both) world.remove(action.b, action.a)
      break
    case 'wait':
      break
  }
}

function reseed(world: AuditedOverlay, slot: number, hears: number): void {
  world.order(
    (orders, sequence) => {
      const colony: ColonyOrders = {
        colony: slot,
        seeding: sequence,
        salt: sequence,
        placing: true,
        placeX: 100,
        placeY: 100,
        encounterRate: 0.01,
        birthRateX: 0.01,
        birthRateY: 0.01,
        refused: [],
      }
      return {
        ...orders,
        sequence,
        colonies: [...orders.colonies.filter((other) => other.colony !== slot), colony],
      }
    },
    (agent) => (hears & (1 << agent)) !== 0,
  )
}
