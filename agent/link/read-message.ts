import type { Frame } from '@/lib/method/frame'
import { type CloseName, decodeFrame, type LinkPeer, MAX_PASS_CHARS, MESSAGE_KIND } from '@/lib/protocol'
import type { LinkTrust, RelayKind } from './link-contract'

/** What a proven peer's message asks for; `refused` closes the connection. */
export type Message =
  | { kind: 'frame'; frame: Frame }
  | { kind: 'pass'; token: string }
  | { kind: RelayKind; bytes: Uint8Array }
  | { kind: 'refused'; close: CloseName; detail: string }

/** Reads and judges a message, and does nothing about it. Kinds other than frames are of version 2. */
export function readMessage(
  bytes: Uint8Array,
  peer: LinkPeer,
  trust: LinkTrust,
  heldOrdersSequence: number,
): Message {
  if (peer.version >= 2) {
    const body = bytes.subarray(1)
    if (bytes[0] === MESSAGE_KIND.relay) return { kind: 'relay', bytes: body }
    if (bytes[0] === MESSAGE_KIND.relayReply) return { kind: 'relayReply', bytes: body }
    if (bytes[0] === MESSAGE_KIND.pass) {
      if (body.length > MAX_PASS_CHARS) return refused('bad-frame', `a pass of ${body.length} bytes`)
      return { kind: 'pass', token: Buffer.from(body).toString('latin1') }
    }
  }
  const decoded = decodeFrame(bytes, { heldOrdersSequence, version: peer.version })
  if (!decoded.ok) {
    return refused(decoded.error.code === 'too-large' ? 'too-large' : 'bad-frame', decoded.error.code)
  }
  return believed(decoded.frame, peer, trust)
}

/** A frame with those parts alone that the overlay's keys vouch for. */
function believed(frame: Frame, peer: LinkPeer, trust: LinkTrust): Message {
  const { orders, statement } = frame
  if (!orders && !statement) return { kind: 'frame', frame }
  const kept: Frame = { ...frame, orders: null }
  // Nobody signs orders on a link of version 1: whoever passes them on could have made them up.
  if (orders?.proof) {
    const judged = trust.judgeOrders(orders.proof)
    if (judged.ok) kept.orders = { ...orders, orders: judged.orders }
    // A key that is not known may be one of a newer ring than is held here.
    else if (judged.reason !== 'unknown-key') return refused('orders-forged', judged.reason)
  }
  if (statement && !isOwn(statement, peer, trust)) kept.statement = null
  return { kind: 'frame', frame: kept }
}

function isOwn({ statement, ...rest }: NonNullable<Frame['statement']>, peer: LinkPeer, trust: LinkTrust) {
  const { agentId, incarnation } = statement
  if (agentId !== peer.agentId || incarnation !== peer.incarnation) return false
  return trust.judgeStatement({ statement, ...rest })
}

const refused = (close: CloseName, detail: string): Message => ({ kind: 'refused', close, detail })
