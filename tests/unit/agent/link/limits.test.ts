import { describe, expect, test } from 'vitest'
import { BYTE_BURST, FRAME_BURST, RateLimits } from '@/agent/link/rate-limits'
import { originOf } from '@/agent/link/unproven'
import { PACES } from '@/lib/method/pace'

describe('what a peer may send', () => {
  test.each(Object.entries(PACES))(
    'an honest one at %s pace, with stalls of a minute, is never cut off',
    (_, { tickMs }) => {
      const limits = new RateLimits({ tickMs: () => tickMs })
      let nowMs = 0
      let refused = 0
      for (let round = 0; round < 20; round++) {
        // Either end stands still for 60 s: all that the other has sent comes at once.
        nowMs += 60_000
        for (let frame = 0; frame < 60_000 / tickMs; frame++)
          if (!limits.take('tar-01', 120, nowMs)) refused += 1
        for (let frame = 0; frame < 50; frame++) {
          nowMs += tickMs * 0.9
          if (!limits.take('tar-01', 120, nowMs)) refused += 1
        }
      }
      expect(refused).toBe(0)
    },
  )

  test('one at drill pace beside one that still walks calmly has until the orders end', () => {
    const limits = new RateLimits({ tickMs: () => PACES.calm.tickMs })
    let refused = 0
    for (let nowMs = 0; nowMs < 30_000; nowMs += PACES.drill.tickMs) {
      if (!limits.take('tar-01', 120, nowMs)) refused += 1
    }
    expect(refused).toBe(0)
  })

  test('orders with the longest lists, every interval, are within the limits at steady pace', () => {
    const limits = new RateLimits({ tickMs: () => PACES.steady.tickMs })
    let refused = 0
    for (let nowMs = 0; nowMs < 600_000; nowMs += 200) {
      if (!limits.take('tar-01', nowMs % 2_000 === 0 ? 256 * 1024 : 200, nowMs)) refused += 1
    }
    expect(refused).toBe(0)
  })

  test('ten times the pace is stopped within seconds, and dialing again refills nothing', () => {
    const limits = new RateLimits({ tickMs: () => 200 })
    let atMs: number | null = null
    for (let nowMs = 0; atMs === null && nowMs < 600_000; nowMs += 1) {
      if (!limits.take('eel-09', 100, nowMs)) atMs = nowMs
    }
    expect(atMs).toBeLessThan(4_000)
    limits.prune(atMs! + 10)
    expect(limits.take('eel-09', 100, atMs! + 10)).toBe(false)
    expect(limits.take('tar-01', 100, atMs! + 10)).toBe(true)
  })

  test('bytes count as well as frames', () => {
    const limits = new RateLimits({ tickMs: () => 200 })
    let taken = 0
    while (limits.take('eel-09', 64 * 1024, 0)) taken += 1
    expect(taken).toBe(BYTE_BURST / (64 * 1024))
    expect(taken).toBeLessThan(FRAME_BURST)
  })

  test('peers that have been quiet for long are forgotten', () => {
    const limits = new RateLimits({ tickMs: () => 200 })
    while (limits.take('eel-09', 100, 0));
    limits.prune(200_000)
    expect(limits.take('eel-09', 100, 200_000)).toBe(true)
  })
})

test.each([
  ['192.0.2.7:4711', '192.0.2.7'],
  ['[::ffff:192.0.2.7]:4711', '192.0.2.7'],
  ['[2001:db8:1:2:3:4:5:6]:4711', '2001:db8:1:2::/64'],
  ['[2001:DB8:1:2::9]:4711', '2001:db8:1:2::/64'],
  ['[2001:db8::9]:4711', '2001:db8:0:0::/64'],
  ['[::1]:4711', '0:0:0:0::/64'],
  ['tar-01.harbourline.example:80', 'tar-01.harbourline.example'],
])('who stands behind %s is %s', (remote, origin) => {
  expect(originOf(remote)).toBe(origin)
})
