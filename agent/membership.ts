import type { PaceName } from '@/lib/method/pace'
import type { KeyPair, PassGrant, SessionReply } from '@/lib/protocol'
import type { AgentIdentity, AgentInit } from './agent-contract'
import type { Clock } from './clock'
import type { CollectorClient } from './collector/client'
import { Reporter } from './collector/reporter'
import type { Logger } from './logger'
import { Standing } from './standing'
import { Trust } from './trust/key-ring'
import { KEY_RETRIES, OwnKeys, type RotationResult } from './trust/own-keys'

export interface MembershipComponents {
  collector: CollectorClient
  clock: Clock
  logger: Logger
  keys: KeyPair
  randomBytes: (count: number) => Uint8Array
}

export interface MembershipInit
  extends Pick<AgentInit, 'version' | 'host' | 'node' | 'address' | 'onRing' | 'onKey'> {
  identity: AgentIdentity
  pace: PaceName
  hasOrders: () => boolean
  /** Another key of one's own is in force; before the pass that belongs to it. */
  onKeys: (keys: KeyPair) => void
  onPass: (grant: PassGrant) => void
}

/** What makes an agent one of its overlay: whom it trusts, its own key, its session with the collector, its standing. */
export class Membership {
  readonly trust: Trust
  readonly reporter: Reporter
  readonly standing: Standing
  private readonly ownKeys: OwnKeys
  private readonly logger: Logger
  private readonly init: MembershipInit

  constructor(components: MembershipComponents, init: MembershipInit) {
    const { collector, clock, logger, keys, randomBytes } = components
    const { agentId, overlayId, overlayKey, keyRing, pendingKeys, weights, pass } = init.identity
    this.init = init
    this.logger = logger
    const ring = keyRing ?? { version: 1, keys: [overlayKey] }
    this.trust = new Trust({ overlayId, ring, onRing: init.onRing })
    this.reporter = new Reporter(
      { client: collector, clock, keys, randomBytes },
      {
        agentId,
        onPass: (grant) => this.standing.renew(grant),
        onSession: (reply) => this.noteSession(reply),
        facts: () => ({ host: init.host, version: init.version, address: init.address, node: init.node }),
      },
    )
    const nowMs = () => this.reporter.nowMs()
    this.ownKeys = new OwnKeys(
      { collector, clock, randomBytes, nowMs },
      { agentId, keys, pending: pendingKeys, onKey: init.onKey },
    )
    this.standing = new Standing(
      { trust: this.trust, nowMs, publicKey: () => this.keys.publicKey },
      { agentId, pace: init.pace, weights, pass, onPass: init.onPass },
    )
  }

  /** As in force now. */
  get keys(): KeyPair {
    return this.ownKeys.current
  }

  takeKey(keys: KeyPair, signal: AbortSignal): Promise<RotationResult> {
    this.ownKeys.offer(keys)
    return this.rotateKey(signal)
  }

  async rotateKey(signal: AbortSignal, retries = KEY_RETRIES): Promise<RotationResult> {
    const result = await this.ownKeys.rotate(signal, retries)
    if (!result.ok) return result
    this.reporter.setKeys(result.keys)
    this.init.onKeys(result.keys)
    this.standing.renew(result.grant)
    this.logger.info({}, 'another key of this agent is in force')
    return result
  }

  /** Goes on with a rotation whose outcome is not known. */
  async finishRotation(signal: AbortSignal): Promise<void> {
    if (this.ownKeys.isUnfinished) await this.rotateKey(signal, 0)
  }

  private noteSession(reply: SessionReply): void {
    if (reply.keyRings) this.trust.follow(reply.keyRings)
    if (!this.init.hasOrders()) this.standing.begin(reply)
    this.logger.debug({ clockSkewMs: Math.round(this.reporter.skewMs) }, 'session opened')
  }
}
