import { afterAll, beforeAll, expect, it } from 'vitest'
import { type Entry, gapsMs, isUnbroken, termsIn } from '../support/processes/journal'
import { TwoCollectors } from '../support/processes/two-collectors'

/** Without a reading at brisk pace, whose readings are a second apart. */
const GAP_MOST_MS = 5_000
const ROUNDS_AFTER = 3

let two: TwoCollectors

beforeAll(async () => {
  two = await TwoCollectors.start()
})
afterAll(async () => two?.stop())

const lastOf = (entries: readonly Entry[]): Entry => {
  const last = entries.at(-1)
  if (!last) throw new Error('Nothing has been written.')
  return last
}

/** Until another than `holder` has led for some rounds. */
const handedOver = (holder: string) =>
  two.until((entries) => {
    const since = entries.filter(({ kind }) => kind === 'orders').slice(-ROUNDS_AFTER)
    return since.length === ROUNDS_AFTER && since.every((entry) => entry.holder !== holder)
  })

function expectOneAfterTheOther(entries: readonly Entry[], terms: number): void {
  expect(termsIn(entries)).toHaveLength(terms)
  expect(new Set(termsIn(entries)).size).toBe(terms)
  expect(isUnbroken(entries)).toBe(true)
  for (const kind of ['orders', 'reading'] as const)
    expect(Math.max(...gapsMs(entries, kind, two.awake))).toBeLessThan(GAP_MOST_MS)
}

it('an overlay whose leader is stopped in the middle of a round has another within 5 s, and the old one writes nothing more', async () => {
  const before = await two.until((entries) => entries.filter(({ kind }) => kind === 'reading').length >= 2)
  const { holder } = lastOf(before)
  const stopped = two.leading
  await two.journal.midRound(() => stopped.child.signal('SIGSTOP'))
  await handedOver(holder)
  const ended = stopped.child.nextLine((line) => line.includes('"no longer leading"'))
  stopped.child.signal('SIGCONT')
  await ended
  const resumedAt = lastOf(await two.journal.entries()).sequence
  const after = await two.until((entries) => lastOf(entries).sequence >= resumedAt + ROUNDS_AFTER)
  expectOneAfterTheOther(after, 2)
})

it('an overlay whose leader is killed has another within 5 s: the one that was stopped before', async () => {
  const { holder } = lastOf(await two.journal.entries())
  const killed = two.leading
  killed.child.signal('SIGKILL')
  await killed.child.end
  two.drop(killed)
  expectOneAfterTheOther(await handedOver(holder), 3)
})
