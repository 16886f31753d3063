import type { CollectorDistance, ColonyFrame, Frame } from '../method/frame'
import { ByteReader, MalformedBytes } from './bytes'
import {
  DISTANCE_MASK,
  DISTANCE_SHIFT,
  FLAG_CLOSING,
  FLAG_CONSENTS,
  readColony,
  WEIGHT_SCALE,
} from './frame-codec'
import { type PartsError, readParts } from './frame-parts'
import { MAX_COLONIES, MAX_FRAME_BYTES, MAX_MEAN_OCCUPANCY } from './limits'
import { LINK_VERSIONS, MESSAGE_KIND } from './message-kind'

export type FrameError =
  | { code: 'too-large'; bytes: number; limitBytes: number }
  | { code: 'not-a-frame'; kind: number | null }
  | { code: 'unsupported-version'; version: number }
  | { code: 'malformed'; reason: string; at: number }
  | { code: 'out-of-range'; field: string; value: number }
  | PartsError

export type DecodeResult = { ok: true; frame: Frame } | { ok: false; error: FrameError }

export interface DecodeInit {
  /** Orders up to this sequence are held already: they are skipped unread, `orders` is then null. */
  heldOrdersSequence?: number
  /** The version agreed on for the link; without it, any that is spoken here. */
  version?: number
}

/** Frame from bytes of a peer. Never throws; numbers in the result are finite and within their bounds. */
export function decodeFrame(bytes: Uint8Array, init: DecodeInit = {}): DecodeResult {
  if (bytes.length > MAX_FRAME_BYTES) {
    return refuse({ code: 'too-large', bytes: bytes.length, limitBytes: MAX_FRAME_BYTES })
  }
  if (bytes[0] !== MESSAGE_KIND.frame) return refuse({ code: 'not-a-frame', kind: bytes[0] ?? null })
  try {
    return read(new ByteReader(bytes, 1), init)
  } catch (error) {
    if (error instanceof MalformedBytes) {
      return refuse({ code: 'malformed', reason: error.message, at: error.at })
    }
    throw error
  }
}

const isSpoken = (version: number): boolean => LINK_VERSIONS.some((spoken) => spoken === version)

function read(reader: ByteReader, init: DecodeInit): DecodeResult {
  const version = reader.byte()
  if (version !== (init.version ?? version) || !isSpoken(version)) {
    return refuse({ code: 'unsupported-version', version })
  }
  const flags = reader.byte()
  const number = reader.varint()
  const heardNumber = reader.varint()
  const heardFrames = version >= 2 ? reader.varint() : 0
  const weight = reader.varint()
  const ordersSequence = reader.varint()
  const newestSeeding = reader.varint()
  const colonyCount = reader.varint()
  if (number === 0) return outOfRange('number', number)
  if (weight > WEIGHT_SCALE) return outOfRange('weight', weight)
  if (colonyCount > MAX_COLONIES) return outOfRange('colonies', colonyCount)
  const colonies: ColonyFrame[] = []
  for (let index = 0; index < colonyCount; index++) {
    // In place: this is done for every colony of every frame.
    const outer = reader.enter(reader.byte())
    const colony = readColony(reader, newestSeeding)
    reader.leave(outer)
    if (colony.seeding < 0) return outOfRange('seeding', colony.seeding)
    if (Math.abs(colony.meanOccupancy) > MAX_MEAN_OCCUPANCY)
      return outOfRange('meanOccupancy', colony.meanOccupancy)
    for (const other of colonies)
      if (other.colony === colony.colony) return outOfRange('colony', colony.colony)
    colonies.push(colony)
  }
  const parts = readParts(reader, version, ordersSequence, init.heldOrdersSequence ?? -1)
  if ('code' in parts) return refuse(parts)
  const frame: Frame = {
    number,
    heardNumber,
    weight: weight / WEIGHT_SCALE,
    closing: (flags & FLAG_CLOSING) !== 0,
    consents: (flags & FLAG_CONSENTS) !== 0,
    ordersSequence,
    orders: parts.orders,
    colonies,
  }
  if (version < 2) return { ok: true, frame }
  const distance = distanceOf(flags)
  const { statement, rounds } = parts
  return { ok: true, frame: { ...frame, distance, heardFrames, statement, ...(rounds && { rounds }) } }
}

const DISTANCES: readonly CollectorDistance[] = [0, 1, 2, 3]
const distanceOf = (flags: number): CollectorDistance =>
  DISTANCES[(flags >> DISTANCE_SHIFT) & DISTANCE_MASK] ?? 3

const refuse = (error: FrameError): DecodeResult => ({ ok: false, error })
const outOfRange = (field: string, value: number): DecodeResult =>
  refuse({ code: 'out-of-range', field, value })
