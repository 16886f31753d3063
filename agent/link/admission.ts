import type { CloseName } from '@/lib/protocol'

/** What is known of a peer at the moment its handshake is done. */
export interface AdmissionCase {
  role: 'dialer' | 'listener'
  isKnown: boolean
  isBanned: boolean
  acceptUnknown: boolean
  incarnation: string
  /** This incarnation had a link and was replaced by another. */
  isRetired: boolean
  /** By the orders or for its figures, nobody here keeps a link with it: then how it is closed. */
  shut: CloseName | null
  /** There are as many links as there may be, and none with this agent. */
  isFull: boolean
  /** When this connection was opened, counted over all connections of this program. */
  opened: number
  /** The newest incarnation seen of this peer, and when its connection was opened; null for the first. */
  latest: { incarnation: string; opened: number } | null
}

/**
 * Whether a proven peer may have a link; else the name of the failure.
 *
 * Of two incarnations the one whose connection was opened later is the newer: a start of a program lived when its
 * connection was opened (it was dialed or accepted before, and signed our fresh nonce after), and two starts of one
 * agent do not live at once. A proof that arrives late from a start that has died since is thus told apart. Where two
 * do live at once (one configuration copied), the one that was replaced stays out: they would take turns for ever.
 */
export function judgeAdmission(candidate: AdmissionCase): CloseName | null {
  const { latest } = candidate
  if (candidate.shut) return candidate.shut
  if (candidate.isRetired) return 'stale-incarnation'
  if (latest && latest.incarnation !== candidate.incarnation && candidate.opened < latest.opened) {
    return 'stale-incarnation'
  }
  if (!isNeighbour(candidate)) return 'not-a-neighbour'
  return candidate.isFull ? 'too-many-links' : null
}

function isNeighbour({ role, isKnown, isBanned, acceptUnknown }: AdmissionCase): boolean {
  if (role === 'dialer') return isKnown
  return !isBanned && (isKnown || acceptUnknown)
}
