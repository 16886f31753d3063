import { describe, expect, it } from 'vitest'
import { answersInMs } from '@/lib/method/control/answer'
import { PACES } from '@/lib/method/pace'

// ω·λ₂ = 0.1 per second.
const overlay = {
  pace: PACES.steady,
  agents: 36,
  linkTimePerSecond: 0.2,
  lambda2: 0.5,
  lambda3AtMost: 1.5,
}

describe('the time an overlay takes to answer a change', () => {
  it('is two intervals, three averages in haste, and what a new colony needs to halve its excess', () => {
    expect(answersInMs(overlay)).toBe(Math.round(4_000 + 6_000 + (1000 * Math.LN2) / 0.4))
  })

  it('does not wait for modes that lie within half of λ₂ above it', () => {
    expect(answersInMs({ ...overlay, lambda3AtMost: 0.51 })).toBe(
      Math.round(10_000 + (1000 * Math.LN2) / 0.1),
    )
  })

  it('is longer where agents are too many to report in haste, and at calm pace', () => {
    expect(answersInMs({ ...overlay, agents: 1_000 })).toBeGreaterThan(answersInMs(overlay) + 15_000)
    expect(answersInMs({ ...overlay, pace: PACES.calm })).toBeGreaterThan(4 * answersInMs(overlay))
  })

  it('is bounded where hardly anything walks', () => {
    expect(answersInMs({ ...overlay, linkTimePerSecond: 0 })).toBe(10_000)
    expect(answersInMs({ ...overlay, linkTimePerSecond: 1e-9 })).toBe(40_000)
  })
})
