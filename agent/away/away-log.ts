import { z } from 'zod'
import { type AwaySummary, MAX_AWAY } from '@/lib/protocol'

/** What is kept of times without a collector: the newest, up to either limit. */
export const AWAY_MOST_ENTRIES = 500
export const AWAY_MOST_BYTES = 64 * 1024

const count = z.number().int().min(0)
const entrySchema = z.object({
  /** By the collector's time as well as it is known. */
  at: z.iso.datetime(),
  event: z.enum(['away', 'facts', 'link-up', 'link-down']),
  live: count,
  known: count,
  /** Agent id; absent where the overlay names no links. */
  peer: z.string().max(64).optional(),
})
export type AwayEntry = z.infer<typeof entrySchema>

/** Adds one, and lets go of the oldest where there are too many. */
export function withEntry(entries: readonly AwayEntry[], entry: AwayEntry): AwayEntry[] {
  const kept = [...entries, entry].slice(-AWAY_MOST_ENTRIES)
  let bytes = kept.reduce((sum, one) => sum + lineOf(one).length, 0)
  let dropped = 0
  while (bytes > AWAY_MOST_BYTES) bytes -= lineOf(kept[dropped++]!).length
  return kept.slice(dropped)
}

/** One span per time away, oldest first; of more than the report may carry, the last. */
export function summarise(entries: readonly AwayEntry[]): AwaySummary[] {
  const spans: AwaySummary[] = []
  for (const { at, event, live, known } of entries) {
    const last = spans.at(-1)
    if (!last || event === 'away') {
      spans.push({ fromAt: at, toAt: at, leastLive: live, known, linkDowns: event === 'link-down' ? 1 : 0 })
      continue
    }
    last.toAt = at
    last.leastLive = Math.min(last.leastLive, live)
    last.known = Math.max(last.known, known)
    if (event === 'link-down') last.linkDowns += 1
  }
  return spans.slice(-MAX_AWAY)
}

/** One line of JSON per entry. */
export const textOf = (entries: readonly AwayEntry[]): string => entries.map(lineOf).join('')

/** Lines that are none are skipped: another program may have written into the file. */
export function entriesOf(text: string): AwayEntry[] {
  const entries = text.split('\n').flatMap((line) => {
    try {
      const parsed = entrySchema.safeParse(JSON.parse(line))
      return parsed.success ? [parsed.data] : []
    } catch {
      return []
    }
  })
  return entries.slice(-AWAY_MOST_ENTRIES)
}

const lineOf = (entry: AwayEntry): string => `${JSON.stringify(entry)}\n`
