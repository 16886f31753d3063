/** Numbers modulo 2⁶⁴ that are as good as random to whoever does not know the pair's secret. */
export type MaskStream = (round: number, entries: number) => BigUint64Array

/** Adds in place; a BigUint64Array keeps what is modulo 2⁶⁴ by itself. */
export function addTo(sum: BigUint64Array, vector: BigUint64Array): void {
  for (let at = 0; at < sum.length; at++) sum[at] = sum[at]! + vector[at]!
}

/**
 * Puts one pair's mask on a vector, in place. Of both ends the one with the smaller id adds what the other takes away, so that
 * nothing is left of it in the sum (K. Bonawitz et al., "Practical secure aggregation for privacy-preserving machine
 * learning", CCS 2017, section 4; from memory).
 */
export function applyMask(
  vector: BigUint64Array,
  stream: MaskStream,
  round: number,
  { own, peer }: { own: string; peer: string },
): void {
  const mask = stream(round, vector.length)
  const sign = own < peer ? 1n : -1n
  for (let at = 0; at < vector.length; at++) vector[at] = vector[at]! + sign * mask[at]!
}

/** As base64url of eight bytes an entry, low byte first. */
export function toText(vector: BigUint64Array): string {
  const bytes = new DataView(new ArrayBuffer(vector.length * 8))
  for (const [index, value] of vector.entries()) bytes.setBigUint64(index * 8, value, true)
  return Buffer.from(bytes.buffer).toString('base64url')
}

/** Null where the text is no whole number of entries. */
export function fromText(text: string): BigUint64Array | null {
  return fromBytes(Buffer.from(text, 'base64url'))
}

/** Null where the bytes are no whole number of entries. */
export function fromBytes(bytes: Uint8Array): BigUint64Array | null {
  if (bytes.length % 8 !== 0) return null
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.length)
  return BigUint64Array.from({ length: bytes.length / 8 }, (_, index) => view.getBigUint64(index * 8, true))
}
