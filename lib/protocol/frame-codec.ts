/**
 * Frames as bytes. Integers are unsigned varints unless said otherwise.
 *
 *   kind version flags number heardNumber [heardFrames] weight×1000 ordersSequence newestSeeding colonies
 *   per colony, in a block preceded by its length in one byte:
 *     colony×2+refused  newestSeeding−seeding  sentX sentY receivedX receivedY  z̄×1024 (signed)  …
 *   parts until the end: type length bytes (frame-parts.ts)
 *
 * `heardFrames`, and the distance to the collector in the flags, are there from version 2 on.
 * A reader skips what follows the known fields inside a colony's block, and parts of a type it does not know.
 */
import type { ColonyFrame, Frame } from '../method/frame'
import { SUMS_SCALE } from '../method/report'
import { type ByteReader, ByteWriter } from './bytes'
import { writeParts } from './frame-parts'
import { MAX_COLONIES, MAX_FRAME_BYTES } from './limits'
import { FRAME_VERSION, MESSAGE_KIND } from './message-kind'

export const FLAG_CLOSING = 1
export const FLAG_CONSENTS = 2
/** Two bits; 3 also says that the collector cannot be reached at all. */
export const DISTANCE_SHIFT = 2
export const DISTANCE_MASK = 3
export const WEIGHT_SCALE = 1000

/** @throws RangeError for what no frame may hold: a program's mistake, never a peer's */
export function encodeFrame(frame: Frame, version: number = FRAME_VERSION): Uint8Array {
  if (frame.colonies.length > MAX_COLONIES)
    throw new RangeError(`${frame.colonies.length} colonies in a frame`)
  const writer = new ByteWriter(64 + 24 * frame.colonies.length)
  const newestSeeding = frame.colonies.reduce((newest, { seeding }) => Math.max(newest, seeding), 0)
  writer.byte(MESSAGE_KIND.frame)
  writer.byte(version)
  writer.byte(flagsOf(frame, version))
  writer.varint(frame.number)
  writer.varint(frame.heardNumber)
  if (version >= 2) writer.varint(frame.heardFrames ?? 0)
  writer.varint(weightSteps(frame.weight))
  writer.varint(frame.ordersSequence)
  writer.varint(newestSeeding)
  writer.varint(frame.colonies.length)
  for (const colony of frame.colonies) writer.shortBlock(() => writeColony(writer, colony, newestSeeding))
  writeParts(writer, frame, version)
  if (writer.length > MAX_FRAME_BYTES) throw new RangeError(`a frame of ${writer.length} bytes`)
  return writer.finish()
}

function flagsOf({ closing, consents, distance = 3 }: Frame, version: number): number {
  const flags = (closing ? FLAG_CLOSING : 0) | (consents ? FLAG_CONSENTS : 0)
  return version >= 2 ? flags | (distance << DISTANCE_SHIFT) : flags
}

function writeColony(writer: ByteWriter, colony: ColonyFrame, newestSeeding: number): void {
  writer.varint(colony.colony * 2 + (colony.refused ? 1 : 0))
  writer.varint(newestSeeding - colony.seeding)
  writer.varint(colony.sentX)
  writer.varint(colony.sentY)
  writer.varint(colony.receivedX)
  writer.varint(colony.receivedY)
  writer.signedVarint(Math.round(colony.meanOccupancy * SUMS_SCALE))
}

/** Thousandths; a weight that is not 0 stays so, because 0 says the link is down. */
function weightSteps(weight: number): number {
  if (!(weight >= 0 && weight <= 1)) throw new RangeError(`a link's weight lies in 0..1, not ${weight}`)
  return weight === 0 ? 0 : Math.max(1, Math.round(weight * WEIGHT_SCALE))
}

/** @throws MalformedBytes where the bytes end too soon or an integer is too large */
export function readColony(block: ByteReader, newestSeeding: number): ColonyFrame {
  const slot = block.varint()
  return {
    colony: Math.floor(slot / 2),
    refused: slot % 2 === 1,
    seeding: newestSeeding - block.varint(),
    sentX: block.varint(),
    sentY: block.varint(),
    receivedX: block.varint(),
    receivedY: block.varint(),
    meanOccupancy: block.signedVarint() / SUMS_SCALE,
  }
}
