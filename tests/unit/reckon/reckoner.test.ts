import { afterEach, describe, expect, it } from 'vitest'
import { ring, star } from '@/lib/method/graphs'
import { ReckonError, Reckoner } from '@/lib/reckon'
import { bundleWorker } from '@/lib/reckon/bundle'

interface Timer {
  delayMs: number
  run: () => void
}

const root = process.cwd()
const made: Reckoner[] = []
const timers = new Set<Timer>()
function reckoner(bundle: () => Promise<string> = () => bundleWorker(root)): Reckoner {
  const one = new Reckoner({
    bundle,
    after(delayMs, run) {
      const timer = { delayMs, run }
      timers.add(timer)
      return () => timers.delete(timer)
    },
  })
  made.push(one)
  return one
}
afterEach(async () => {
  for (const one of made.splice(0)) await one.stop()
  timers.clear()
})

describe('the thread for exact figures', () => {
  it('works out λ₂ and new links beside the process, several asked for at once', async () => {
    const one = reckoner()
    const [alone, plan] = await Promise.all([
      one.reckon('connectivity', { graph: star(5) }),
      one.reckon('reinforce', { graph: ring(12), init: { links: 2, weight: 1 } }),
    ])
    expect(alone.lambda2).toBeCloseTo(1, 9)
    expect(plan.links).toHaveLength(2)
  })

  it('says what went wrong, and goes on', async () => {
    const one = reckoner()
    const graph = { ...ring(4), nodes: 0, offsets: new Int32Array(1) }
    await expect(one.reckon('connectivity', { graph })).rejects.toThrow('the graph has no nodes')
    expect((await one.reckon('connectivity', { graph: ring(4) })).lambda2).toBeCloseTo(2, 9)
  })

  it('gives up what takes too long, and starts anew for the next', async () => {
    const never = reckoner(async () => "require('node:worker_threads').parentPort.on('message', () => {})")
    const asked = never.reckon('connectivity', { graph: ring(4) })
    const failed = expect(asked).rejects.toMatchObject({ code: 'failed' })
    await expect.poll(() => timers.size).toBe(1)
    for (const { run } of timers) run()
    await failed
  })

  it('says so where the thread ends by itself', async () => {
    const one = reckoner(async () => 'process.exit(3)')
    await expect(one.reckon('connectivity', { graph: ring(4) })).rejects.toBeInstanceOf(ReckonError)
  })

  it('takes no more than it can hold, nor anything once stopped', async () => {
    const never = reckoner(async () => "require('node:worker_threads').parentPort.on('message', () => {})")
    const graph = ring(4)
    const asked = Array.from({ length: 9 }, () => never.reckon('connectivity', { graph }))
    const all = Promise.allSettled(asked)
    await expect(never.reckon('connectivity', { graph })).rejects.toMatchObject({ code: 'again' })
    await never.stop()
    expect((await all).every(({ status }) => status === 'rejected')).toBe(true)
    await expect(never.reckon('connectivity', { graph })).rejects.toMatchObject({ code: 'again' })
  })

  it('takes back what has not begun', async () => {
    const never = reckoner(async () => "require('node:worker_threads').parentPort.on('message', () => {})")
    const graph = ring(4)
    const first = never.reckon('connectivity', { graph }).catch(() => 'ended')
    const end = new AbortController()
    const second = never.reckon('connectivity', { graph }, end.signal)
    end.abort(new Error('gone'))
    await expect(second).rejects.toThrow('gone')
    await never.stop()
    expect(await first).toBe('ended')
  })
})
