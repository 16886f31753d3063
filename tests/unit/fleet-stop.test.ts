import { afterEach, describe, expect, test } from 'vitest'
import { LineQueue } from '@/scripts/fleet/line-queue'
import { Waiters } from '@/scripts/fleet/waiters'
import { FakeClock } from '../support/fake-clock'
import { during, memorySwarm, type Swarm } from '../support/memory-swarm'

describe('a wait', () => {
  const stop = () => new AbortController()

  test('ends with the reason of its signal, and its time does not run on', async () => {
    const clock = new FakeClock()
    const stopping = stop()
    let looks = 0
    const never = () => {
      looks += 1
      return false
    }
    const waiters = new Waiters({ clock })
    const waiting = waiters.until(never, 60_000, 'too late', stopping.signal)
    stopping.abort(new Error('stopping'))
    await expect(waiting).rejects.toThrow('stopping')
    waiters.look()
    expect(looks).toBe(1)
    await expect(waiters.until(() => true, 60_000, 'too late', stopping.signal)).rejects.toThrow('stopping')
  })

  test('ends when it is done, or when its time is over', async () => {
    const clock = new FakeClock()
    const waiters = new Waiters({ clock })
    let isDone = false
    const waiting = waiters.until(() => isDone, 60_000, 'too late', stop().signal)
    isDone = true
    waiters.look()
    await waiting
    const late = expect(waiters.until(() => false, 60_000, 'too late', stop().signal)).rejects.toThrow(
      'too late',
    )
    await clock.advance(60_000)
    await late
  })
})

test('of the lines that wait when a queue is closed none is obeyed; the one under way is waited for', async () => {
  const obeyed: string[] = []
  let finish = () => {}
  const queue = new LineQueue({
    obey: async (line) => {
      obeyed.push(line)
      await new Promise<void>((resolve) => {
        finish = resolve
      })
      obeyed.push(`${line} done`)
    },
  })
  for (const line of ['cut tar-01 gul-04', ' ', 'stop tar-01', 'exact']) queue.push(line)
  await new Promise((resolve) => setImmediate(resolve))
  const closing = queue.close()
  finish()
  await closing
  expect(obeyed).toEqual(['cut tar-01 gul-04', 'cut tar-01 gul-04 done'])
})

describe('a fleet that is stopped', () => {
  let swarm: Swarm
  afterEach(() => swarm.stop())

  test('while a link does not come up stops at once, and the command says why', async () => {
    swarm = await memorySwarm({ edges: 'tar-01,gul-04\ngul-04,pin-02', seed: 'stop' })
    await during(swarm.clock, swarm.fleet.start())
    swarm.network.weather = () => []
    const joining = expect(swarm.fleet.join('tar-01', 'pin-02')).rejects.toThrow('The fleet is stopping.')
    await swarm.clock.advance(100)
    const stoppedAtMs = swarm.clock.monotonicMs()
    await during(swarm.clock, swarm.fleet.stop())
    await during(swarm.clock, joining)
    expect(swarm.clock.monotonicMs() - stoppedAtMs).toBeLessThan(1_000)
  })

  test('while an agent takes its address leaves nothing listening', async () => {
    swarm = await memorySwarm({ edges: 'tar-01,gul-04', seed: 'stop' })
    await during(swarm.clock, swarm.fleet.start())
    const address = swarm.fleet.member('tar-01').agent!.address!
    await during(swarm.clock, swarm.fleet.stopAgent('tar-01'))
    const starting = expect(swarm.fleet.startAgent('tar-01')).rejects.toThrow('The fleet is stopping.')
    await during(swarm.clock, swarm.fleet.stop())
    await starting
    const dialed = await swarm.network.transport('gul-04').dial(address, new AbortController().signal)
    expect(dialed).toEqual({ ok: false, reason: `nothing listens at ${address}` })
  })
})
