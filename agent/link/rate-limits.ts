/** Frames a peer may send per own tick, lastingly: its pace may be ahead of ours for as long as orders travel. */
export const FRAMES_PER_TICK = 4
/**
 * Frames that may come at once. What piled up in a socket while either end stood still comes in one burst: an end that
 * hears nothing for 10 s gives the connection up, which is 500 frames at drill pace; a peer at drill pace beside one
 * that still walks calmly sends 50 a second for up to one expiry of orders, 1,500. Twice that.
 */
export const FRAME_BURST = 3_000
/** Ordinary frames have about a hundred bytes; orders with long lists and relayed reports have up to 256 KiB. */
export const BYTES_PER_FRAME = 16 * 1024
export const BYTE_BURST = 8 * 1024 * 1024

interface Bucket {
  frames: number
  bytes: number
  atMs: number
}

export interface RateLimitsInit {
  tickMs: () => number
}

/** What each peer may send. Kept per peer, not per connection: dialing again refills nothing. */
export class RateLimits {
  private readonly tickMs: () => number
  private readonly buckets = new Map<string, Bucket>()

  constructor({ tickMs }: RateLimitsInit) {
    this.tickMs = tickMs
  }

  /** @returns false where the message is one too many */
  take(peer: string, bytes: number, nowMs: number): boolean {
    const bucket = this.buckets.get(peer) ?? { frames: FRAME_BURST, bytes: BYTE_BURST, atMs: nowMs }
    this.buckets.set(peer, bucket)
    const earned = (FRAMES_PER_TICK * Math.max(0, nowMs - bucket.atMs)) / this.tickMs()
    bucket.atMs = nowMs
    bucket.frames = Math.min(FRAME_BURST, bucket.frames + earned) - 1
    bucket.bytes = Math.min(BYTE_BURST, bucket.bytes + earned * BYTES_PER_FRAME) - bytes
    const isWithin = bucket.frames >= 0 && bucket.bytes >= 0
    bucket.frames = Math.max(0, bucket.frames)
    bucket.bytes = Math.max(0, bucket.bytes)
    return isWithin
  }

  /** Forgets peers that have been quiet for so long that they may send everything again. */
  prune(nowMs: number): void {
    const fullMs = (FRAME_BURST / FRAMES_PER_TICK) * this.tickMs()
    for (const [peer, { atMs }] of this.buckets) if (nowMs - atMs > fullMs) this.buckets.delete(peer)
  }
}
