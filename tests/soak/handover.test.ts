import { afterAll, beforeAll, expect, it } from 'vitest'
import { setup, teardown } from '../support/global-setup'
import { gapsMs, isUnbroken, termsIn } from '../support/processes/journal'
import { TwoCollectors } from '../support/processes/two-collectors'

const TIMES = Number(process.env.THINSPAN_SOAK_HANDOVERS ?? 12)
const WAYS = ['killed', 'stopped', 'stopped in the middle of a round'] as const
const GAP_MOST_MS = 5_000
const ROUNDS_BETWEEN = 5

let two: TwoCollectors

beforeAll(async () => {
  await setup()
  two = await TwoCollectors.start()
}, 120_000)
afterAll(async () => {
  await two?.stop()
  await teardown()
}, 120_000)

it(`of ${TIMES} hand-overs each takes under 5 s, and nobody writes after another has`, async () => {
  await two.until((entries) => entries.filter(({ kind }) => kind === 'reading').length >= 2)
  const table: { way: string; gapMs: number }[] = []
  for (let time = 0; time < TIMES; time++) {
    const way = WAYS[time % WAYS.length] ?? 'killed'
    const before = await two.journal.entries()
    const { leading } = two
    if (way === 'killed') {
      leading.child.signal('SIGKILL')
      await leading.child.end
    } else if (way === 'stopped') leading.child.signal('SIGSTOP')
    else await two.journal.midRound(() => leading.child.signal('SIGSTOP'))
    const holder = before.at(-1)?.holder
    await two.until(
      (entries) =>
        entries.slice(before.length).filter((entry) => entry.kind === 'reading' && entry.holder !== holder)
          .length >= ROUNDS_BETWEEN,
    )
    if (way === 'killed') {
      two.drop(leading)
      await two.addProcess()
    } else {
      const ended = leading.child.nextLine((line) => line.includes('"no longer leading"'))
      leading.child.signal('SIGCONT')
      await ended
    }
    const gaps = gapsMs(
      (await two.journal.entries()).slice(before.length - ROUNDS_BETWEEN),
      'reading',
      two.awake,
    )
    table.push({ way, gapMs: Math.round(Math.max(...gaps)) })
  }
  console.table(table)
  const entries = await two.journal.entries()
  expect(isUnbroken(entries)).toBe(true)
  expect(termsIn(entries)).toHaveLength(new Set(termsIn(entries)).size)
  expect(table.filter(({ gapMs }) => gapMs >= GAP_MOST_MS)).toEqual([])
})
