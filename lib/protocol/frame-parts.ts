/**
 * The optional parts at a frame's end: type length bytes.
 *
 *   1  orders, version 1: ageMs, then the orders as JSON
 *   2  orders, from version 2 on: ageMs signature(64) key(32), then the JSON text that was signed
 *   3  statement, from version 2 on (statement-part.ts)
 */
import type { Frame } from '../method/frame'
import { type ByteReader, ByteWriter } from './bytes'
import { KEY_BYTES, SIGNATURE_BYTES } from './keys'
import { MAX_ORDERS_BYTES } from './limits'
import { ordersBytes, parseOrders } from './orders-part'
import { readStatement, writeStatement } from './statement-part'

export const PART_ORDERS = 1
export const PART_SIGNED_ORDERS = 2
export const PART_STATEMENT = 3

export function writeParts(writer: ByteWriter, { orders, statement }: Frame, version: number): void {
  if (version < 2) {
    if (orders) writeOrders(writer, orders)
    return
  }
  // Without the collector's signature nobody could believe them.
  if (orders?.proof) writeSignedOrders(writer, orders.ageMs, orders.proof)
  if (statement) writePart(writer, PART_STATEMENT, (part) => writeStatement(part, statement))
}

function writeOrders(writer: ByteWriter, { orders, ageMs }: NonNullable<Frame['orders']>): void {
  writePart(writer, PART_ORDERS, (part) => {
    part.varint(ageMs)
    part.raw(checked(ordersBytes(orders)))
  })
}

type Proof = NonNullable<NonNullable<Frame['orders']>['proof']>

function writeSignedOrders(writer: ByteWriter, ageMs: number, { text, key, signature }: Proof): void {
  writePart(writer, PART_SIGNED_ORDERS, (part) => {
    part.varint(ageMs)
    part.base64url(signature, SIGNATURE_BYTES)
    part.base64url(key, KEY_BYTES)
    part.raw(checked(new TextEncoder().encode(text)))
  })
}

function checked(json: Uint8Array): Uint8Array {
  if (json.length > MAX_ORDERS_BYTES) throw new RangeError(`orders of ${json.length} bytes`)
  return json
}

function writePart(writer: ByteWriter, type: number, fill: (part: ByteWriter) => void): void {
  const part = new ByteWriter()
  fill(part)
  writer.varint(type)
  writer.varint(part.length)
  writer.raw(part.finish())
}

export type Parts = Pick<Frame, 'orders'> & { statement: NonNullable<Frame['statement']> | null }
export type PartsError = { code: 'bad-orders' | 'bad-statement'; issue: string }

/** @throws MalformedBytes where the bytes end too soon or an integer is too large */
export function readParts(
  reader: ByteReader,
  version: number,
  ordersSequence: number,
  heldOrdersSequence: number,
): Parts | PartsError {
  const ordersType = version < 2 ? PART_ORDERS : PART_SIGNED_ORDERS
  const parts: Parts = { orders: null, statement: null }
  while (reader.left > 0) {
    const type = reader.varint()
    const block = reader.block(reader.varint())
    if (type === PART_STATEMENT && version >= 2) {
      if (parts.statement) return { code: 'bad-statement', issue: 'given twice' }
      const statement = readStatement(block)
      if (!statement) return { code: 'bad-statement', issue: 'no statement' }
      parts.statement = statement
    }
    if (type !== ordersType || ordersSequence <= heldOrdersSequence) continue
    if (parts.orders) return { code: 'bad-orders', issue: 'given twice' }
    const orders = version < 2 ? readOrders(block) : readSignedOrders(block)
    if ('issue' in orders) return { code: 'bad-orders', issue: orders.issue }
    if (orders.orders.sequence !== ordersSequence) {
      return { code: 'bad-orders', issue: 'the sequence is not the one the frame follows' }
    }
    parts.orders = orders
  }
  return parts
}

function readOrders(block: ByteReader): NonNullable<Frame['orders']> | { issue: string } {
  const ageMs = block.varint()
  const parsed = parseOrders(block.rest())
  return parsed.ok ? { orders: parsed.orders, ageMs } : { issue: parsed.issue }
}

function readSignedOrders(block: ByteReader): NonNullable<Frame['orders']> | { issue: string } {
  const ageMs = block.varint()
  const signature = block.base64url(SIGNATURE_BYTES)
  const key = block.base64url(KEY_BYTES)
  const bytes = block.rest()
  const parsed = parseOrders(bytes)
  if (!parsed.ok) return { issue: parsed.issue }
  return { orders: parsed.orders, ageMs, proof: { text: new TextDecoder().decode(bytes), key, signature } }
}
