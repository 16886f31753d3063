import type { OrdersProof } from '@/lib/method/frame'
import type { WalkNode } from '@/lib/method/node'
import type { Orders } from '@/lib/method/orders'
import type { Random } from '@/lib/method/random'
import type { SignedStatement } from '@/lib/method/statement'
import type { KeyPair, PassResult, SignedOrdersResult } from '@/lib/protocol'
import type { Backoff } from '../backoff'
import type { Clock } from '../clock'
import type { Logger } from '../logger'
import type { Transport } from '../transport/transport'
import type { MaskSecrets } from './mask-secrets'

export const HANDSHAKE_TIMEOUT_MS = 5_000
/** Connections that have not proved themselves, in all and from one address; more are turned away. */
export const MAX_UNPROVEN = 256
export const MAX_UNPROVEN_PER_ADDRESS = 64
/** Agents one agent keeps links with. */
export const MAX_LINKS = 2_048
/** A removal that the other end does not answer is over after this time. */
export const REMOVAL_MS = 10_000
/** A connection on which nothing came for the longer of these is given up. */
export const SILENT_MS = 10_000
export const SILENT_TICKS = 25

/** The agent's own pass, and the judging of others'. */
export interface Passes {
  own(): string
  judge(token: string): Promise<PassResult>
  hasExpired(expiresAtSeconds: number): boolean
}

/** What the overlay's keys say of what neighbours pass on. */
export interface LinkTrust {
  judgeOrders(proof: OrdersProof): SignedOrdersResult
  /** Whether the collector's receipt for a statement is good. */
  judgeStatement(statement: SignedStatement): boolean
}

export interface LinkEvent {
  kind: 'link-up' | 'link-down' | 'link-ended'
  peer: string
  /** Why a link went down. */
  reason: string
}

/** Messages that travel through neighbours towards the collector, and the answers to them. */
export type RelayKind = 'relay' | 'relayReply'

export interface LinkManagerComponents {
  transport: Transport
  clock: Clock
  random: Random
  logger: Logger
  node: WalkNode
  /** To begin with; `setKeys` puts others in their place. */
  keys: KeyPair
  passes: Passes
  trust: LinkTrust
  /** base64url of 32 fresh random bytes. */
  nonce: () => string
  /** Without them links share no secrets, and the agent takes no part in masked rounds. */
  secrets?: MaskSecrets
}

export interface LinkManagerInit {
  /** Takes links from agents of the overlay that this one was not told of: the other end was. */
  acceptUnknown: boolean
  backoff: Backoff
  tickMs: () => number
  handshakeTimeoutMs?: number
  maxUnproven?: number
  maxUnprovenPerAddress?: number
  maxLinks?: number
  /** Of the link protocol; all that are spoken, unless said otherwise. */
  versions?: readonly number[]
  onOrders?: (orders: Orders) => void
  onEvent?: (event: LinkEvent) => void
  onRelay?: (peer: string, kind: RelayKind, bytes: Uint8Array) => void
}
