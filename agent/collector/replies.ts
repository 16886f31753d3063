import type { OrdersProof } from '@/lib/method/frame'
import type { Orders } from '@/lib/method/orders'
import type { Report } from '@/lib/method/report'
import type { SignedStatement } from '@/lib/method/statement'
import { type ReportReply, statementOf, type UpgradeOffer } from '@/lib/protocol'
import type { Health } from '../health'
import type { Logger } from '../logger'
import type { Trust } from '../trust/key-ring'

export interface ReplyComponents {
  trust: Trust
  node: {
    readonly ordersSequence: number
    adopt(orders: Orders, ageMs: number, nowMs: number, proof?: OrdersProof): boolean
    setStatement(statement: SignedStatement): void
  }
  health: Health
  logger: Logger
}

export interface ReplyInit {
  agentId: string
  onUpgradeOffer?: (offer: UpgradeOffer) => void
  follow: (orders: Orders) => void
}

export interface TakenReply {
  reply: ReportReply
  report: Report
  /** On arrival. */
  ordersAgeMs: number
  nowMs: number
}

/** Does as the collector says, as far as the overlay's key vouches for it. @returns what was not believed, in sentences */
export function takeReply(components: ReplyComponents, init: ReplyInit, taken: TakenReply): string[] {
  const { trust } = components
  // Keys first: the rest may be signed by the newest.
  const { keyRings } = taken.reply
  if (keyRings && keyRings.length > 0 && trust.follow(keyRings))
    components.logger.info({ version: trust.ring.version }, 'the overlay has another signing key')
  const problems = [
    takeOrders(components, init, taken),
    takeReceipt(components, init, taken),
    takeOffer(components, init, taken),
  ].filter((problem) => problem !== null)
  for (const problem of problems) components.logger.warn({}, problem)
  return problems
}

function takeOrders(
  { trust, node }: ReplyComponents,
  { follow }: ReplyInit,
  { reply, ordersAgeMs, nowMs }: TakenReply,
): string | null {
  if (reply.signedOrders === undefined && reply.orders)
    return 'the collector is older than this agent and does not sign its orders: update it first'
  if (!reply.signedOrders) return null
  const judged = trust.judgeOrders(reply.signedOrders)
  if (!judged.ok) return `the collector's orders are not followed: ${judged.reason}`
  if (node.adopt(judged.orders, ordersAgeMs, nowMs, reply.signedOrders)) follow(judged.orders)
  return null
}

/** From now on neighbours are told what the collector was told, with its receipt. */
function takeReceipt(
  { trust, node }: ReplyComponents,
  { agentId }: ReplyInit,
  { reply, report }: TakenReply,
): string | null {
  if (!reply.receipt) return null
  const { key, receipt } = reply.receipt
  const signed = { statement: statementOf(agentId, report), key, receipt }
  if (!trust.judgeStatement(signed)) return "the collector's receipt does not hold"
  node.setStatement(signed)
  return null
}

function takeOffer(
  { trust, health }: ReplyComponents,
  { onUpgradeOffer }: ReplyInit,
  { reply: { upgrade } }: TakenReply,
): string | null {
  if (upgrade === undefined) return null
  if (upgrade && !trust.isOffered(upgrade)) return 'a version was offered that the overlay did not sign'
  if (health.noteOffer(upgrade, onUpgradeOffer !== undefined) && upgrade) onUpgradeOffer?.(upgrade)
  return null
}
