import { describe, expect, it } from 'vitest'
import { isGrave } from '@/lib/collector/level'
import { USUAL_FROZEN_MOST_DAYS, usualNow } from '@/lib/collector/usual'

const DAY_MS = 86_400_000
const nowMs = 100 * DAY_MS

describe('what is usual', () => {
  it('is what was looked up, and before the first look what is remembered', () => {
    expect(usualNow(0.5, { usual: 0.6, graveSinceMs: null }, nowMs)).toBe(0.5)
    expect(usualNow(null, { usual: 0.6, graveSinceMs: null }, nowMs)).toBeNull()
    expect(usualNow(undefined, { usual: 0.6, graveSinceMs: null }, nowMs)).toBe(0.6)
    expect(usualNow(undefined, { usual: null }, nowMs)).toBeNull()
  })

  it('stays as it was during an incident, but not for longer than a week, and not where it is not known', () => {
    const grave = (days: number) => ({ usual: 0.6, graveSinceMs: nowMs - days * DAY_MS })
    expect(usualNow(0.2, grave(0), nowMs)).toBe(0.6)
    expect(usualNow(0.2, grave(USUAL_FROZEN_MOST_DAYS - 0.1), nowMs)).toBe(0.6)
    expect(usualNow(0.2, grave(USUAL_FROZEN_MOST_DAYS), nowMs)).toBe(0.2)
    expect(usualNow(0.2, { ...grave(1), usual: null }, nowMs)).toBe(0.2)
  })

  it('is left by a split and by a fall below it, not by how an overlay is built', () => {
    expect(isGrave(['below-usual'])).toBe(true)
    expect(isGrave(['few-links', 'nothing-crosses'])).toBe(true)
    expect(isGrave(['few-links'])).toBe(false)
    expect(isGrave([])).toBe(false)
  })
})
