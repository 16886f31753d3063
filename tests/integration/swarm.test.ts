import { expect, test } from 'vitest'
import { during, memorySwarm } from '../support/memory-swarm'

/** Two rings of six with chords, three links between them. */
function twoHarbours(): string {
  const lines = ['source,target']
  for (const harbour of ['tar', 'gul']) {
    for (let at = 0; at < 6; at++) {
      for (const step of [1, 2]) lines.push(`${harbour}-0${at},${harbour}-0${(at + step) % 6}`)
    }
  }
  for (const at of [0, 2, 4]) lines.push(`tar-0${at},gul-0${at}`)
  return lines.join('\n')
}

test('a swarm of real agents on a fake clock reads its own λ₂, and follows when a crossing link goes', async () => {
  const swarm = await memorySwarm({ edges: twoHarbours(), seed: 'swarm' })
  await during(swarm.clock, swarm.fleet.start())
  const values: number[] = []
  swarm.collector.onEstimate = ({ lambda2 }) => {
    if (lambda2 !== null) values.push(lambda2)
  }
  const meanOver = async (ms: number) => {
    values.length = 0
    await swarm.clock.advance(ms)
    return values.reduce((sum, value) => sum + value, 0) / values.length
  }
  await swarm.clock.advance(6_000)
  const before = swarm.fleet.exact().lambda2!
  expect(Math.abs((await meanOver(2_000)) / before - 1)).toBeLessThan(0.03)
  await during(swarm.clock, swarm.fleet.cut('tar-02', 'gul-02'))
  const after = swarm.fleet.exact().lambda2!
  expect(after).toBeLessThan(0.8 * before)
  await swarm.clock.advance(4_000)
  expect(Math.abs((await meanOver(2_000)) / after - 1)).toBeLessThan(0.03)
  await swarm.stop()
})
