import type { Cut, Overlay, OverlayLink } from '@/lib/data/dto'
import { formatAtMostWithout, formatCount } from './format'

/** What the reading comes to without a link: an upper bound, and said so. */
export function ifItGoes(
  link: OverlayLink,
  lambda2: number | null,
  crossingLinks: number | null,
  unheard: ReadonlySet<string> = new Set(),
): string | null {
  if (link.state === 'lost') return null
  const silent = [link.a, link.b].filter((name) => unheard.has(name))
  // What the far end says is not known: a bound would claim more than that.
  if (silent.length > 0) return `${silent.join(' and ')} unheard`
  if (crossingLinks === 1) return 'the overlay falls apart'
  if (link.share === null || lambda2 === null) return null
  return `the reading falls to ${formatAtMostWithout(lambda2, link.share)} or lower`
}

/** Why links are not named, in plain words; null where all are. */
export function whyHidden(cut: Cut, disclosure: Overlay['disclosure']): string | null {
  const total = cut.crossingLinks
  if (total === null || total <= cut.links.length) return null
  const hidden = total - cut.links.length
  if (disclosure === 'sealed') {
    return `This overlay is sealed: agents hand over sums only, so ${formatCount(total, 'link')} over the cut ${total === 1 ? 'is' : 'are'} counted and none is named. Each node's own agent knows its links.`
  }
  if (disclosure === 'flagged') {
    return `${formatCount(hidden, 'further link')} over the cut ${hidden === 1 ? 'is' : 'are'} not named: in a flagged overlay a link is named only when it carries much of the reading and both its ends consent.`
  }
  return `${formatCount(hidden, 'further link')} over the cut ${hidden === 1 ? 'has' : 'have'} not been reported by name yet.`
}
