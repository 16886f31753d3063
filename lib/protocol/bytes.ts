/** 2⁵³ − 1 takes eight groups of seven bits. */
const MAX_VARINT_BYTES = 8

export class ByteWriter {
  private bytes: Uint8Array
  private at = 0

  constructor(capacity = 256) {
    this.bytes = new Uint8Array(capacity)
  }

  /** Makes room for `count` more bytes. */
  private reserve(count: number): void {
    if (this.at + count <= this.bytes.length) return
    const larger = new Uint8Array(Math.max(this.bytes.length * 2, this.at + count))
    larger.set(this.bytes.subarray(0, this.at))
    this.bytes = larger
  }

  byte(value: number): void {
    this.reserve(1)
    this.bytes[this.at++] = value
  }

  /** Unsigned integer to 2⁵³ − 1, seven bits a byte, low group first. @throws RangeError for anything else */
  varint(value: number): void {
    if (!Number.isSafeInteger(value) || value < 0) throw new RangeError(`not an unsigned integer: ${value}`)
    this.reserve(MAX_VARINT_BYTES)
    if (value < 0x80) {
      this.bytes[this.at++] = value
      return
    }
    let rest = value
    while (rest >= 0x80) {
      this.bytes[this.at++] = (rest % 0x80) | 0x80
      rest = rest >= 0x8000_0000 ? Math.floor(rest / 0x80) : rest >>> 7
    }
    this.bytes[this.at++] = rest
  }

  /** Signed integer below 2⁵² in size, sign in the lowest bit. @throws RangeError for anything else */
  signedVarint(value: number): void {
    this.varint(value < 0 ? -2 * value - 1 : 2 * value)
  }

  raw(bytes: Uint8Array): void {
    this.reserve(bytes.length)
    this.bytes.set(bytes, this.at)
    this.at += bytes.length
  }

  /** Bytes given as base64url. @throws RangeError where they are not `length` bytes */
  base64url(text: string, length: number): void {
    const bytes = Buffer.from(text, 'base64url')
    if (bytes.length !== length) throw new RangeError(`${length} bytes wanted, not ${bytes.length}`)
    this.raw(bytes)
  }

  get length(): number {
    return this.at
  }

  /** What was written so far, as a copy of its own. */
  finish(): Uint8Array {
    return this.bytes.slice(0, this.at)
  }

  /** Writes what `fill` writes, preceded by its length. At most 127 bytes: the length takes one byte. */
  shortBlock(fill: () => void): void {
    this.reserve(1)
    const lengthAt = this.at++
    fill()
    const length = this.at - lengthAt - 1
    if (length > 0x7f) throw new RangeError(`a short block holds 127 bytes, not ${length}`)
    this.bytes[lengthAt] = length
  }
}

/** Raised inside the codec only, where a reader runs past its end or meets what is no integer. */
export class MalformedBytes extends Error {
  readonly at: number

  constructor(message: string, at: number) {
    super(message)
    this.at = at
  }
}

export class ByteReader {
  private readonly bytes: Uint8Array
  private end: number
  at: number

  constructor(bytes: Uint8Array, start = 0, end = bytes.length) {
    this.bytes = bytes
    this.at = start
    this.end = end
  }

  get left(): number {
    return this.end - this.at
  }

  /** @throws MalformedBytes past the end */
  byte(): number {
    if (this.at >= this.end) throw new MalformedBytes('the bytes end too soon', this.at)
    return this.bytes[this.at++]!
  }

  /** @throws MalformedBytes past the end or above 2⁵³ − 1 */
  varint(): number {
    const start = this.at
    if (start < this.end && this.bytes[start]! < 0x80) {
      this.at = start + 1
      return this.bytes[start]!
    }
    let value = 0
    let scale = 1
    for (let read = 0; read < MAX_VARINT_BYTES; read++) {
      const byte = this.byte()
      value += (byte & 0x7f) * scale
      if (byte < 0x80) {
        if (value > Number.MAX_SAFE_INTEGER) break
        return value
      }
      scale *= 0x80
    }
    throw new MalformedBytes('an integer is larger than 2^53 - 1', start)
  }

  signedVarint(): number {
    const value = this.varint()
    return value % 2 === 1 ? -(value + 1) / 2 : value / 2
  }

  /** A reader of the next `length` bytes, which this one skips. @throws MalformedBytes past the end */
  block(length: number): ByteReader {
    if (length > this.left) throw new MalformedBytes('a block is longer than what is left', this.at)
    const inner = new ByteReader(this.bytes, this.at, this.at + length)
    this.at += length
    return inner
  }

  /** Ends this reader after the next `length` bytes. @returns what `leave` takes @throws MalformedBytes past the end */
  enter(length: number): number {
    if (length > this.left) throw new MalformedBytes('a block is longer than what is left', this.at)
    const outer = this.end
    this.end = this.at + length
    return outer
  }

  /** Skips what is left of the block that was entered. */
  leave(outer: number): void {
    this.at = this.end
    this.end = outer
  }

  /** The next `length` bytes as base64url. @throws MalformedBytes past the end */
  base64url(length: number): string {
    return Buffer.from(this.block(length).rest()).toString('base64url')
  }

  /** View of what is left. */
  rest(): Uint8Array {
    return this.bytes.subarray(this.at, this.end)
  }
}
