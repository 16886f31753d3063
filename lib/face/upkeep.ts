import type { SigningKey, UpgradeOfferDto, Upgrades } from '@/lib/data/dto'
import { formatCount } from './format'

export type OfferStanding = 'under way' | 'taken by all' | 'halted'

export function offerStanding({ haltedAt, counts }: UpgradeOfferDto): OfferStanding {
  if (haltedAt !== null) return 'halted'
  return counts.offered > 0 && counts.runs >= counts.offered ? 'taken by all' : 'under way'
}

/** "3 of 12 run it; 1 failed, 8 without word yet": what became of an offer. */
export function offerProgress({ counts }: UpgradeOfferDto): string {
  const { offered, runs, failed, waiting, declined } = counts
  if (offered === 0) return 'no agent it is meant for'
  const rest = [
    failed > 0 ? `${failed} failed` : null,
    waiting > 0 ? `${waiting} without word yet` : null,
    declined > 0 ? `${declined} ${declined === 1 ? 'takes' : 'take'} no upgrades` : null,
  ].filter((part) => part !== null)
  return `${runs} of ${offered} run it${rest.length > 0 ? `; ${rest.join(', ')}` : ''}`
}

/** Whom an offer is made to. */
export function offeredTo(label: UpgradeOfferDto['label']): string {
  return label === null ? 'every agent' : `${label.key}=${label.value}`
}

/** Agents that run another version than the one this server serves by itself; null where it serves none. */
export function notCurrent({ releases, versions }: Upgrades): number | null {
  const current = releases.find((release) => release.current)
  if (!current) return null
  return versions.reduce((sum, { version, agents }) => (version === current.version ? sum : sum + agents), 0)
}

/** A key in groups that two people can read to each other. */
export function keyText(publicKey: string): string {
  return publicKey.match(/.{1,8}/g)?.join(' ') ?? publicKey
}

/** How far a rotation is, in a sentence. */
export function rotationText({ heldBy, of }: NonNullable<SigningKey['next']>): string {
  if (of === 0) return 'No agent has joined, so none has to learn of it.'
  if (heldBy >= of) return `All ${formatCount(of, 'agent')} hold the key to come.`
  return `${heldBy} of ${formatCount(of, 'agent')} ${heldBy === 1 ? 'holds' : 'hold'} the key to come.`
}

const HOURS_PER_DAY = 24

/** "after 3 d unheard", "after 36 h unheard", "never". */
export function retireText(hours: number | null | undefined): string {
  if (hours == null) return 'never'
  return hours % HOURS_PER_DAY === 0 ? `after ${hours / HOURS_PER_DAY} d unheard` : `after ${hours} h unheard`
}
