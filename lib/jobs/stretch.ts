export const MINUTE_MS = 60_000
export const HOUR_MS = 60 * MINUTE_MS
const DAY_MS = 24 * HOUR_MS
/** Taken over anew each time, so that a round which was late after all is not left out for good. */
export const TAKEN_ANEW_MS = 5 * MINUTE_MS
/** One transaction takes over at most so much at once. */
const CHUNK_MS = DAY_MS

export interface Stretch {
  fromMs: number
  toMs: number
}

/** Whole parts of the calendar that have come to rest, from where the last run ended; null where there is none. */
export function stretchDue(throughMs: number, restedMs: number, partMs: number): Stretch | null {
  const toMs = Math.floor(restedMs / partMs) * partMs
  const fromMs = Math.floor((throughMs - TAKEN_ANEW_MS) / partMs) * partMs
  return toMs > throughMs ? { fromMs, toMs } : null
}

/** Cut at days, oldest first. */
export function chunksOf({ fromMs, toMs }: Stretch): Stretch[] {
  const chunks: Stretch[] = []
  for (let at = fromMs; at < toMs; ) {
    const end = Math.min(toMs, (Math.floor(at / CHUNK_MS) + 1) * CHUNK_MS)
    chunks.push({ fromMs: at, toMs: end })
    at = end
  }
  return chunks
}
