import type { Link } from './link'

/** A peer whose orders have not advanced for this long does not reach the collector itself. */
export const BEHIND_INTERVALS = 1.5

export function notePeerOrders(link: Link, sequence: number, nowMs: number): void {
  if (sequence <= link.peerOrdersSequence) return
  link.peerOrdersSequence = sequence
  link.peerOrdersAtMs = nowMs
  // Newer than anything passed on: the peer has its own source again.
  if (sequence > link.passedSequence) link.passesOrders = false
}

/** Whether the next frame should carry the orders. Passing them to everyone every time would cost most of a link's bytes. */
export function shouldPassOrders(link: Link, sequence: number, nowMs: number, intervalMs: number): boolean {
  if (link.peerOrdersSequence >= sequence) return false
  if (!link.passesOrders && nowMs - link.peerOrdersAtMs > BEHIND_INTERVALS * intervalMs)
    link.passesOrders = true
  if (!link.passesOrders) return false
  return link.passedSequence < sequence || nowMs - link.peerOrdersAtMs > BEHIND_INTERVALS * intervalMs
}
