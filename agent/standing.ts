import type { Disclosure, Orders, WeightMode } from '@/lib/method/orders'
import { PACES, type Pace, type PaceName } from '@/lib/method/pace'
import {
  PASS_CLOCK_TOLERANCE_SECONDS,
  type PassGrant,
  type RelayedReply,
  type SessionReply,
} from '@/lib/protocol'
import type { Ending } from './agent-contract'
import type { Passes } from './link/link-contract'
import type { Trust } from './trust/key-ring'

export interface StandingComponents {
  trust: Trust
  /** The collector's time. */
  nowMs: () => number
  /** The agent's own key, as it is in force. */
  publicKey: () => string
}

export interface StandingInit {
  agentId: string
  pace: PaceName
  weights: WeightMode
  pass: string
  /** A pass that is newer than the present one. */
  onPass: (grant: PassGrant) => void
}

/** What holds for this agent in its overlay: pace, disclosure, weights, its pass, and whether it is still counted. */
export class Standing {
  pace: Pace
  disclosure: Disclosure = 'sealed'
  weights: WeightMode
  ended: Ending | null = null
  private readonly components: StandingComponents
  private readonly init: StandingInit
  private pass: string
  private passExpiresAtMs = 0

  constructor(components: StandingComponents, init: StandingInit) {
    this.components = components
    this.init = init
    this.pace = PACES[init.pace]
    this.weights = init.weights
    this.pass = init.pass
  }

  /** @returns why the agent is counted no more, where the orders say so */
  follow(orders: Orders): Ending | null {
    this.pace = orders.pace
    this.disclosure = orders.disclosure
    this.weights = orders.weights ?? this.weights
    const shut = orders.shut?.find(({ agentId }) => agentId === this.init.agentId)
    // One that is left out goes on reporting, so that it can be taken back.
    if (!shut || shut.reason === 'left-out') return null
    return { reason: shut.reason, detail: 'the orders say so' }
  }

  /** A session says what holds until there are orders. */
  begin({ pace, disclosure, weights }: SessionReply): void {
    this.pace = PACES[pace]
    this.disclosure = disclosure
    this.weights = weights ?? this.weights
  }

  renew(grant: PassGrant): void {
    this.pass = grant.pass
    this.passExpiresAtMs = Date.parse(grant.passExpiresAt)
    this.init.onPass(grant)
  }

  /** Of an answer that came through neighbours only what proves itself is worth anything. */
  async takeRelayed({ pass }: RelayedReply): Promise<void> {
    const { trust, nowMs, publicKey } = this.components
    if (!pass || Date.parse(pass.passExpiresAt) <= this.passExpiresAtMs) return
    const judged = await trust.judgePass(pass.pass, new Date(nowMs()))
    if (!judged.ok) return
    const { agentId, key, expiresAt } = judged.claims
    const isOwn = agentId === this.init.agentId && key === publicKey()
    if (!isOwn || expiresAt * 1000 <= this.passExpiresAtMs) return
    this.renew({ pass: pass.pass, passExpiresAt: new Date(expiresAt * 1000).toISOString() })
  }

  passes(): Passes {
    const { trust, nowMs } = this.components
    return {
      own: () => this.pass,
      judge: (token) => trust.judgePass(token, new Date(nowMs())),
      hasExpired: (expiresAt) => nowMs() / 1000 > expiresAt + PASS_CLOCK_TOLERANCE_SECONDS,
    }
  }
}
