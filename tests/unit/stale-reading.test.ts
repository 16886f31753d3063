import { expect, it } from 'vitest'
import { isStale } from '@/lib/data/stale-reading'
import { PACES } from '@/lib/method/pace'

it('an evaluation is stale once agents would be unheard, and not within ten seconds', () => {
  const limits = { drill: 10_000, brisk: 10_000, steady: 12_000, calm: 60_000 } as const
  for (const pace of ['drill', 'brisk', 'steady', 'calm'] as const) {
    const { intervalMs } = PACES[pace]
    expect([isStale(limits[pace], intervalMs), isStale(limits[pace] + 1, intervalMs)]).toEqual([false, true])
  }
})
