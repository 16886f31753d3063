import type { ColonyFrame, Frame } from '../method/frame'
import { ByteReader, MalformedBytes } from './bytes'
import { FLAG_CLOSING, FLAG_CONSENTS, PART_ORDERS, readColony, WEIGHT_SCALE } from './frame-codec'
import { MAX_COLONIES, MAX_FRAME_BYTES, MAX_MEAN_OCCUPANCY } from './limits'
import { FRAME_VERSION, MESSAGE_KIND } from './message-kind'
import { parseOrders } from './orders-part'

export type FrameError =
  | { code: 'too-large'; bytes: number; limitBytes: number }
  | { code: 'not-a-frame'; kind: number | null }
  | { code: 'unsupported-version'; version: number }
  | { code: 'malformed'; reason: string; at: number }
  | { code: 'out-of-range'; field: string; value: number }
  | { code: 'bad-orders'; issue: string }

export type DecodeResult = { ok: true; frame: Frame } | { ok: false; error: FrameError }

export interface DecodeInit {
  /** Orders up to this sequence are held already: they are skipped unread, `orders` is then null. */
  heldOrdersSequence?: number
}

/** Frame from bytes of a peer. Never throws; numbers in the result are finite and within their bounds. */
export function decodeFrame(bytes: Uint8Array, init: DecodeInit = {}): DecodeResult {
  if (bytes.length > MAX_FRAME_BYTES) {
    return refuse({ code: 'too-large', bytes: bytes.length, limitBytes: MAX_FRAME_BYTES })
  }
  if (bytes[0] !== MESSAGE_KIND.frame) return refuse({ code: 'not-a-frame', kind: bytes[0] ?? null })
  try {
    return read(new ByteReader(bytes, 1), init.heldOrdersSequence ?? -1)
  } catch (error) {
    if (error instanceof MalformedBytes) {
      return refuse({ code: 'malformed', reason: error.message, at: error.at })
    }
    throw error
  }
}

function read(reader: ByteReader, heldOrdersSequence: number): DecodeResult {
  const version = reader.byte()
  if (version !== FRAME_VERSION) return refuse({ code: 'unsupported-version', version })
  const flags = reader.byte()
  const number = reader.varint()
  const heardNumber = reader.varint()
  const weight = reader.varint()
  const ordersSequence = reader.varint()
  const newestSeeding = reader.varint()
  const colonyCount = reader.varint()
  if (number === 0) return outOfRange('number', number)
  if (weight > WEIGHT_SCALE) return outOfRange('weight', weight)
  if (colonyCount > MAX_COLONIES) return outOfRange('colonies', colonyCount)
  const colonies: ColonyFrame[] = []
  for (let index = 0; index < colonyCount; index++) {
    const colony = readColony(reader.block(reader.byte()), newestSeeding)
    if (colony.seeding < 0) return outOfRange('seeding', colony.seeding)
    if (Math.abs(colony.meanOccupancy) > MAX_MEAN_OCCUPANCY)
      return outOfRange('meanOccupancy', colony.meanOccupancy)
    if (colonies.some((other) => other.colony === colony.colony)) return outOfRange('colony', colony.colony)
    colonies.push(colony)
  }
  const parts = readParts(reader, ordersSequence, heldOrdersSequence)
  if ('code' in parts) return refuse(parts)
  return {
    ok: true,
    frame: {
      number,
      heardNumber,
      weight: weight / WEIGHT_SCALE,
      closing: (flags & FLAG_CLOSING) !== 0,
      consents: (flags & FLAG_CONSENTS) !== 0,
      ordersSequence,
      orders: parts.orders,
      colonies,
    },
  }
}

function readParts(
  reader: ByteReader,
  ordersSequence: number,
  heldOrdersSequence: number,
): { orders: Frame['orders'] } | FrameError {
  let orders: Frame['orders'] = null
  while (reader.left > 0) {
    const type = reader.varint()
    const block = reader.block(reader.varint())
    if (type !== PART_ORDERS || ordersSequence <= heldOrdersSequence) continue
    if (orders) return { code: 'bad-orders', issue: 'given twice' }
    const ageMs = block.varint()
    const parsed = parseOrders(block.rest())
    if (!parsed.ok) return { code: 'bad-orders', issue: parsed.issue }
    if (parsed.orders.sequence !== ordersSequence) {
      return { code: 'bad-orders', issue: 'the sequence is not the one the frame follows' }
    }
    orders = { orders: parsed.orders, ageMs }
  }
  return { orders }
}

const refuse = (error: FrameError): DecodeResult => ({ ok: false, error })
const outOfRange = (field: string, value: number): DecodeResult =>
  refuse({ code: 'out-of-range', field, value })
