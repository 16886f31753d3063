/**
 * A statement with its receipt as bytes, for a frame's part.
 *
 *   agentId incarnation (each: length in one byte, ASCII)  reportNumber  newestSeeding  colonies
 *   per colony: colony  newestSeeding−seeding  z̄×1024 (signed)  births culls walkerTime linkTime
 *   key(32) receipt(64)
 */
import type { ColonyStatement, SignedStatement } from '../method/statement'
import type { ByteReader, ByteWriter } from './bytes'
import { KEY_BYTES, SIGNATURE_BYTES } from './keys'
import { MAX_COLONIES } from './limits'

/** Ids and incarnations are printable ASCII without blanks; anything else could be said in two ways. */
const WORD = /^[\x21-\x7e]{1,64}$/

/** @throws RangeError for what no statement may hold */
export function writeStatement(writer: ByteWriter, { statement, key, receipt }: SignedStatement): void {
  const { agentId, incarnation, reportNumber, colonies } = statement
  if (colonies.length > MAX_COLONIES) throw new RangeError(`${colonies.length} colonies in a statement`)
  const newestSeeding = colonies.reduce((newest, { seeding }) => Math.max(newest, seeding), 0)
  for (const word of [agentId, incarnation]) {
    if (!WORD.test(word)) throw new RangeError(`not an id: ${word}`)
    writer.shortBlock(() => writer.raw(Buffer.from(word, 'ascii')))
  }
  writer.varint(reportNumber)
  writer.varint(newestSeeding)
  writer.varint(colonies.length)
  for (const colony of colonies) {
    writer.varint(colony.colony)
    writer.varint(newestSeeding - colony.seeding)
    writer.signedVarint(colony.mean)
    writer.varint(colony.births)
    writer.varint(colony.culls)
    writer.varint(colony.walkerTime)
    writer.varint(colony.linkTime)
  }
  writer.base64url(key, KEY_BYTES)
  writer.base64url(receipt, SIGNATURE_BYTES)
}

/** Null for what is no statement. @throws MalformedBytes where the bytes end too soon or an integer is too large */
export function readStatement(block: ByteReader): SignedStatement | null {
  const [agentId, incarnation] = [word(block), word(block)]
  const reportNumber = block.varint()
  const newestSeeding = block.varint()
  const count = block.varint()
  if (agentId === null || incarnation === null || reportNumber === 0 || count > MAX_COLONIES) return null
  const colonies: ColonyStatement[] = []
  for (let index = 0; index < count; index++) {
    const colony = {
      colony: block.varint(),
      seeding: newestSeeding - block.varint(),
      mean: block.signedVarint(),
      births: block.varint(),
      culls: block.varint(),
      walkerTime: block.varint(),
      linkTime: block.varint(),
    }
    if (colony.seeding < 0 || colonies.some((other) => other.colony === colony.colony)) return null
    colonies.push(colony)
  }
  const key = block.base64url(KEY_BYTES)
  const receipt = block.base64url(SIGNATURE_BYTES)
  return { statement: { agentId, incarnation, reportNumber, colonies }, key, receipt }
}

function word(block: ByteReader): string | null {
  const text = Buffer.from(block.block(block.byte()).rest()).toString('latin1')
  return WORD.test(text) ? text : null
}
