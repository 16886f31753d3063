import type { NodeFacts } from '@/lib/method/report'
import { signText, type UpgradeOffer, upgradeText } from '@/lib/protocol'
import type { Sender } from './ingest-store'
import type { OfferFacts, ReplyFacts } from './reply-store'
import { signerOf } from './signer'

/** Signed offers of one process that are kept ready. */
const REMEMBERED_MOST = 1_000
const remembered = new Map<string, UpgradeOffer>()

/** The newest offer for an agent, or null where there is none or it runs that version. */
export function offerFor(
  facts: ReplyFacts,
  { labels, teamId }: Pick<Sender, 'labels' | 'teamId'>,
  { version }: Pick<NodeFacts, 'version'>,
): UpgradeOffer | null {
  const offer = facts.offers.find(
    (one) => one.teamId === teamId && isFor(labels, one.labelKey, one.labelValue),
  )
  return offer && offer.version !== version ? signed(facts, offer) : null
}

export function isFor(labels: Record<string, string>, key: string | null, value: string | null): boolean {
  return key === null || (Object.hasOwn(labels, key) && labels[key] === value)
}

export function releasePath(version: string): string {
  return `/agent/thinspan-agent.mjs?version=${encodeURIComponent(version)}`
}

function signed(facts: ReplyFacts, { version, sha256 }: OfferFacts): UpgradeOffer {
  const offer = { version, sha256, path: releasePath(version) }
  const text = upgradeText(facts.overlayId, offer)
  const key = `${facts.publicKey}\n${text}`
  const known = remembered.get(key)
  if (known) return known
  if (remembered.size >= REMEMBERED_MOST) remembered.clear()
  const { privateKey, publicKey } = signerOf(facts)
  const made = { ...offer, key: publicKey, signature: signText(privateKey, text) }
  remembered.set(key, made)
  return made
}
