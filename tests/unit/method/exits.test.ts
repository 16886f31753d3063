import { expect, test } from 'vitest'
import { openColony, walk } from '@/lib/method/node/colony'
import { ledgerFor, openLink } from '@/lib/method/node/link'
import { exitsFor } from '@/lib/method/node/live-link'
import { createRandom } from '@/lib/method/random'
import { someOrders } from '../../support/frames'

const COLONY = { ...someOrders().colonies[0]!, birthRateX: 0, birthRateY: 0, encounterRate: 0 }
const LINKS = 300
const ROUNDS = 2_000
const refuses = (index: number): boolean => (index >= 100 && index < 200) || index === LINKS - 1
const weightOf = (index: number): number => (index % 2 === 0 ? 1 : 0.4)

test('fewer walkers than a hub has links leave in proportion to weight, and none to a neighbour that refuses them', () => {
  const colony = openColony(COLONY, 0)
  const live = Array.from({ length: LINKS }, (_, index) => {
    const link = openLink(`agent-${index}`, 'start', 0)
    ledgerFor(link, COLONY.colony, COLONY.seeding).peerRefuses = refuses(index)
    return { link, weight: weightOf(index) }
  })
  const random = createRandom('exits')
  const left = new Float64Array(LINKS)
  for (let round = 0; round < ROUNDS; round++) {
    colony.x = 200
    const exits = exitsFor(live, colony)
    walk(colony, exits, 0.4 / exits.totalWeight, random)
    for (let index = 0; index < LINKS; index++) left[index]! += exits.x[index]!
  }
  const open = live.map((_, index) => index).filter((index) => !refuses(index))
  const all = left.reduce((sum, count) => sum + count, 0)
  const weights = open.reduce((sum, index) => sum + weightOf(index), 0)
  expect(left.filter((_, index) => refuses(index)).every((count) => count === 0)).toBe(true)
  // Each link's count is binomial, next to Poisson: five standard deviations.
  for (const index of open) {
    const expected = (all * weightOf(index)) / weights
    expect(Math.abs(left[index]! - expected)).toBeLessThan(5 * Math.sqrt(expected))
  }
})
