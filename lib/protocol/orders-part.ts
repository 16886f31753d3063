import type { Orders } from '../method/orders'
import { MAX_ORDERS_BYTES } from './limits'
import { ordersSchema } from './orders-schema'

const written = new WeakMap<Orders, Uint8Array>()

/** Orders as UTF-8 JSON. Remembered per object: the same orders go to every neighbour. */
export function ordersBytes(orders: Orders): Uint8Array {
  const present = written.get(orders)
  if (present) return present
  const bytes = new TextEncoder().encode(JSON.stringify(orders))
  written.set(orders, bytes)
  return bytes
}

export type OrdersResult = { ok: true; orders: Orders } | { ok: false; issue: string }

export function parseOrders(bytes: Uint8Array): OrdersResult {
  if (bytes.length > MAX_ORDERS_BYTES) return { ok: false, issue: `${bytes.length} bytes are too many` }
  let json: unknown
  try {
    json = JSON.parse(new TextDecoder('utf-8', { fatal: true }).decode(bytes))
  } catch {
    return { ok: false, issue: 'not UTF-8 JSON' }
  }
  const parsed = ordersSchema.safeParse(json)
  if (parsed.success) return { ok: true, orders: parsed.data }
  const issue = parsed.error.issues[0]
  return { ok: false, issue: issue ? `${issue.path.join('.')}: ${issue.message}` : 'not orders' }
}
