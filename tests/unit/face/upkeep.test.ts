import { describe, expect, it } from 'vitest'
import type { UpgradeOfferDto } from '@/lib/data/dto'
import {
  keyText,
  notCurrent,
  offeredTo,
  offerProgress,
  offerStanding,
  retireText,
  rotationText,
} from '@/lib/face/upkeep'

const at = '2031-03-12T11:46:00.000Z'
const offer = (
  counts: Partial<UpgradeOfferDto['counts']>,
  haltedAt: string | null = null,
): UpgradeOfferDto => ({
  id: '1',
  version: '0.3.0',
  label: null,
  offeredAt: at,
  offeredBy: null,
  haltedAt,
  counts: { offered: 12, runs: 0, failed: 0, waiting: 12, declined: 0, ...counts },
})

describe('an offered upgrade', () => {
  it('is under way until all run it, unless it was halted', () => {
    expect(
      [offer({ runs: 3 }), offer({ runs: 12 }), offer({ runs: 12 }, at), offer({ offered: 0 })].map(
        offerStanding,
      ),
    ).toEqual(['under way', 'taken by all', 'halted', 'under way'])
  })

  it('counts who took it, who failed and who does not take any', () => {
    expect(
      [
        offer({ runs: 3, failed: 1, waiting: 6, declined: 2 }),
        offer({ runs: 12, waiting: 0 }),
        offer({ offered: 0, waiting: 0 }),
      ].map(offerProgress),
    ).toEqual([
      '3 of 12 run it; 1 failed, 6 without word yet, 2 take no upgrades',
      '12 of 12 run it',
      'no agent it is meant for',
    ])
    expect([offeredTo(null), offeredTo({ key: 'harbour', value: 'Tarnwick' })]).toEqual([
      'every agent',
      'harbour=Tarnwick',
    ])
  })
})

describe('versions, keys and agents that are gone', () => {
  it('counts agents that run another version than the current one', () => {
    const release = { version: '0.3.0', sha256: 'a'.repeat(64), bytes: 400_000, addedAt: at, current: true }
    const versions = [
      { version: '0.2.0', agents: 30 },
      { version: '0.3.0', agents: 6 },
    ]
    expect(notCurrent({ releases: [release], offers: [], versions })).toBe(30)
    expect(notCurrent({ releases: [], offers: [], versions })).toBeNull()
  })

  it('tells how far a rotation is', () => {
    const next = { publicKey: 'x', of: 36, takesOverAt: at }
    expect([0, 1, 31, 36].map((heldBy) => rotationText({ ...next, heldBy }))).toEqual([
      '0 of 36 agents hold the key to come.',
      '1 of 36 agents holds the key to come.',
      '31 of 36 agents hold the key to come.',
      'All 36 agents hold the key to come.',
    ])
  })

  it('writes a key in groups and hours as days where they are', () => {
    expect(keyText('abcdefghijklmnopqrst')).toBe('abcdefgh ijklmnop qrst')
    expect([null, 6, 24, 36, 168].map(retireText)).toEqual([
      'never',
      'after 6 h unheard',
      'after 1 d unheard',
      'after 36 h unheard',
      'after 7 d unheard',
    ])
  })
})
