/**
 * The optional parts at a frame's end: type length bytes.
 *
 *   1  orders, version 1: ageMs, then the orders as JSON
 *   2  orders, from version 2 on: ageMs signature(64) key(32), then the JSON text that was signed
 *   3  statement, from version 2 on (statement-part.ts)
 *   4  masked rounds, from version 2 on: those ready for, then those heard of; each list: count, first, steps
 */
import type { Frame } from '../method/frame'
import { MOST_ROUNDS, type RoundSaying } from '../method/mask'
import { type ByteReader, ByteWriter } from './bytes'
import { KEY_BYTES, SIGNATURE_BYTES } from './keys'
import { MAX_ORDERS_BYTES } from './limits'
import { ordersBytes, parseOrders } from './orders-part'
import { readStatement, writeStatement } from './statement-part'

export const PART_ORDERS = 1
export const PART_SIGNED_ORDERS = 2
export const PART_STATEMENT = 3
export const PART_ROUNDS = 4

export function writeParts(writer: ByteWriter, { orders, statement, rounds }: Frame, version: number): void {
  if (version < 2) {
    if (orders) writeOrders(writer, orders)
    return
  }
  // Without the collector's signature nobody could believe them.
  if (orders?.proof) writeSignedOrders(writer, orders.ageMs, orders.proof)
  if (statement) writePart(writer, PART_STATEMENT, (part) => writeStatement(part, statement))
  if (rounds && rounds.ready.length + rounds.heard.length > 0)
    writePart(writer, PART_ROUNDS, (part) => {
      writeRounds(part, rounds.ready)
      writeRounds(part, rounds.heard)
    })
}

/** Rising numbers, the newest where there are too many. */
function writeRounds(part: ByteWriter, rounds: readonly number[]): void {
  const said = rounds.slice(-MOST_ROUNDS)
  part.varint(said.length)
  said.forEach((round, index) => {
    part.varint(index === 0 ? round : round - said[index - 1]!)
  })
}

function readRounds(block: ByteReader): number[] | null {
  const count = block.varint()
  if (count > MOST_ROUNDS) return null
  const rounds: number[] = []
  for (let at = 0; at < count; at++) rounds.push(block.varint() + (rounds.at(-1) ?? 0))
  return rounds.every(Number.isSafeInteger) ? rounds : null
}

function readSaying(block: ByteReader): RoundSaying | null {
  const ready = readRounds(block)
  const heard = ready && readRounds(block)
  return ready && heard && { ready, heard }
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

export type Parts = Pick<Frame, 'orders'> & {
  statement: NonNullable<Frame['statement']> | null
  rounds: RoundSaying | null
}
export type PartsError = { code: 'bad-orders' | 'bad-statement' | 'bad-rounds'; issue: string }

/** @throws MalformedBytes where the bytes end too soon or an integer is too large */
export function readParts(
  reader: ByteReader,
  version: number,
  ordersSequence: number,
  heldOrdersSequence: number,
): Parts | PartsError {
  const ordersType = version < 2 ? PART_ORDERS : PART_SIGNED_ORDERS
  const parts: Parts = { orders: null, statement: null, rounds: null }
  while (reader.left > 0) {
    const type = reader.varint()
    const block = reader.block(reader.varint())
    if (type === PART_STATEMENT && version >= 2) {
      if (parts.statement) return { code: 'bad-statement', issue: 'given twice' }
      const statement = readStatement(block)
      if (!statement) return { code: 'bad-statement', issue: 'no statement' }
      parts.statement = statement
    }
    if (type === PART_ROUNDS && version >= 2) {
      if (parts.rounds) return { code: 'bad-rounds', issue: 'given twice' }
      const rounds = readSaying(block)
      if (!rounds) return { code: 'bad-rounds', issue: 'no rounds' }
      parts.rounds = rounds
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
