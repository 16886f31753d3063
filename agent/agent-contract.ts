import type { CollectorDistance } from '@/lib/method/frame'
import type { ShutReason } from '@/lib/method/orders'
import type { PaceName } from '@/lib/method/pace'
import type { Random } from '@/lib/method/random'
import type { AgentHealth, LinkKind } from '@/lib/method/report'
import type { KeyPair, PassGrant, UpgradeOffer } from '@/lib/protocol'
import type { SpoolStore } from './away/spool-store'
import type { Backoff } from './backoff'
import type { Clock } from './clock'
import type { CollectorClient } from './collector/client'
import type { LinkEvent } from './link/link-contract'
import type { LinkStatus } from './link/link-status'
import type { NeighbourSpec } from './link/neighbours'
import type { Logger } from './logger'
import type { ListenInit, Transport } from './transport/transport'
import type { HeldRing } from './trust/key-ring'
import type { KeyChange } from './trust/own-keys'

export interface AgentComponents {
  transport: Transport
  collector: CollectorClient
  clock: Clock
  random: Random
  logger: Logger
  keys: KeyPair
  /** For secrets and ids; not `random`, which need not be hard to guess. */
  randomBytes: (count: number) => Uint8Array
  /** Keeps what happens while the collector is away, for the case that the program ends meanwhile. */
  spool?: SpoolStore
}

/** What enrolment said, and what came of it since. */
export interface AgentIdentity {
  agentId: string
  overlayId: string
  overlayKey: string
  pass: string
  weights: 'unit' | 'delivered'
  /** As kept by `onRing`; at first, version 1 with the overlay's key of enrolment. */
  keyRing?: HeldRing
  /** As kept by `onKey`, where a rotation was not finished. */
  pendingKeys?: KeyPair
}

export interface AgentInit {
  identity: AgentIdentity
  version: string
  /** Until the first orders say theirs. */
  pace: PaceName
  /** Null for an agent that only dials. */
  listen: ListenInit | null
  neighbours?: readonly NeighbourSpec[]
  /** Links from agents of the overlay that this one was not told of: the other end was. */
  acceptUnknown?: boolean
  consents?: boolean
  backoff?: Backoff
  /** Without it, "path", and "path-with-view" once the node's own view of a link was heard. */
  linkKind?: LinkKind
  /** A fingerprint of the machine, so that a copied configuration is noticed. */
  host?: string
  /** How the overlay knows the node. */
  node?: string | null
  /** Where neighbours may dial; what is absent stays as enrolment said. */
  address?: string | null
  /** A renewed pass, to be kept for the next start. */
  onPass?: (grant: PassGrant) => void
  /** A newer key ring, to be kept for the next start. */
  onRing?: (ring: HeldRing) => void
  /** A key of one's own, to be kept before it is used. */
  onKey?: (change: KeyChange) => void | Promise<void>
  /** A version that the overlay's own server offers; the signature has been verified. Once per offer. */
  onUpgradeOffer?: (offer: UpgradeOffer) => void
  onLinkEvent?: (event: LinkEvent) => void
  /** The overlay counts this agent no more: it has stopped reporting and shut its links. `stop` is still due. */
  onEnded?: (ending: Ending) => void
}

export interface Ending {
  reason: Exclude<ShutReason, 'left-out'> | 'ended'
  detail: string
}

export interface AgentStatus {
  agentId: string
  incarnation: string
  address: string | null
  ordersSequence: number
  /** Without fresh orders nothing walks. */
  frozen: boolean
  clockSkewMs: number
  reports: {
    delivered: number
    failed: number
    lastDeliveredMsAgo: number | null
    lastTookMs: number | null
    lastError: string | null
    /** Brought to the collector by neighbours. */
    relayed: number
    lastRelayedMsAgo: number | null
  }
  /** Links to the collector by way of neighbours; 0 while own reports are delivered. */
  distance: CollectorDistance
  /** Nothing gets through by any way; entries wait to be told. */
  away: { isAway: boolean; entries: number; error: string | null }
  keyRing: number
  linkKind: LinkKind
  source: AgentHealth['source']
  upgrade: AgentHealth['upgrade']
  ended: Ending | null
  ticks: { count: number; late: number }
  links: LinkStatus[]
}
