/** TCP is a stream: each message goes with its length (4 bytes) and its channel (1 byte) before it. */
const HEAD_BYTES = 5
/** More than any message of the overlay or of the agent. */
const MOST_BYTES = 512 * 1024

export interface Message {
  channel: number
  bytes: Uint8Array
}

export class Splitter {
  #rest: Buffer = Buffer.alloc(0)

  static join(channel: number, bytes: Uint8Array): Uint8Array {
    const head = Buffer.alloc(HEAD_BYTES)
    head.writeUInt32BE(bytes.length, 0)
    head.writeUInt8(channel, 4)
    return Buffer.concat([head, bytes])
  }

  /** The messages that are whole by now; null where one is larger than any may be. */
  split(chunk: Uint8Array): Message[] | null {
    this.#rest = Buffer.concat([this.#rest, chunk])
    const messages: Message[] = []
    while (this.#rest.length >= HEAD_BYTES) {
      const end = HEAD_BYTES + this.#rest.readUInt32BE(0)
      if (end > MOST_BYTES) return null
      if (this.#rest.length < end) break
      messages.push({ channel: this.#rest.readUInt8(4), bytes: this.#rest.subarray(HEAD_BYTES, end) })
      this.#rest = this.#rest.subarray(end)
    }
    return messages
  }
}
