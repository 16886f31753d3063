import { expect, test } from 'vitest'
import {
  AWAY_MOST_BYTES,
  AWAY_MOST_ENTRIES,
  type AwayEntry,
  entriesOf,
  summarise,
  textOf,
  withEntry,
} from '@/agent/away/away-log'
import { MAX_AWAY } from '@/lib/protocol'

const at = (minute: number) => new Date(Date.UTC(2031, 4, 6, 12, minute)).toISOString()
const entry = (minute: number, event: AwayEntry['event'], live: number, known = 4): AwayEntry => ({
  at: at(minute),
  event,
  live,
  known,
})

test('each time away is one span: when, how few links were live, how many went down', () => {
  const entries = [
    entry(0, 'away', 4),
    entry(1, 'link-down', 3),
    entry(2, 'link-up', 4),
    entry(3, 'link-down', 3, 5),
    entry(9, 'away', 2),
    entry(10, 'facts', 2),
  ]
  expect(summarise(entries)).toEqual([
    { fromAt: at(0), toAt: at(3), leastLive: 3, known: 5, linkDowns: 2 },
    { fromAt: at(9), toAt: at(10), leastLive: 2, known: 4, linkDowns: 0 },
  ])
  expect(summarise([])).toEqual([])
})

test('a span whose beginning was let go starts with what is left of it', () => {
  expect(summarise([entry(4, 'link-down', 1)])).toEqual([
    { fromAt: at(4), toAt: at(4), leastLive: 1, known: 4, linkDowns: 1 },
  ])
})

test('a report carries the last spans', () => {
  const spans = summarise(Array.from({ length: 20 }, (_, minute) => entry(minute, 'away', 1)))
  expect(spans).toHaveLength(MAX_AWAY)
  expect(spans.at(-1)!.fromAt).toBe(at(19))
})

test('the newest entries are kept, within both limits', () => {
  let entries: AwayEntry[] = []
  for (let n = 0; n < 2 * AWAY_MOST_ENTRIES; n++) entries = withEntry(entries, entry(0, 'link-down', n))
  expect(entries).toHaveLength(AWAY_MOST_ENTRIES)
  expect(entries.at(-1)!.live).toBe(2 * AWAY_MOST_ENTRIES - 1)
  for (let n = 0; n < AWAY_MOST_ENTRIES; n++)
    entries = withEntry(entries, { ...entry(1, 'link-up', n), peer: 'p'.repeat(64) })
  expect(textOf(entries).length).toBeLessThanOrEqual(AWAY_MOST_BYTES)
  expect(entries.at(-1)!.live).toBe(AWAY_MOST_ENTRIES - 1)
})

test('what was written is read again, and lines that are none are skipped', () => {
  const entries = [entry(0, 'away', 4), { ...entry(1, 'link-down', 3), peer: 'agent-gul-04' }]
  expect(entriesOf(`${textOf(entries)}{"at":"now"}\nhalf a li`)).toEqual(entries)
})
