import { afterAll, describe, expect, it } from 'vitest'
import { median } from '@/scripts/bench/reading/course'
import { isRight, LIVE_WITHIN, lineOf, MEDIAN_SECONDS, runOf, summaryOf } from '@/scripts/bench/rehearsal'
import { topologies } from '@/scripts/bench/rehearsal/cases'
import type { RehearsalRun } from '@/scripts/bench/rehearsal/course'

const RUNS = Number(process.env.THINSPAN_SOAK_RUNS ?? 2)

describe('rehearsals against the exact λ₂ of what remains', () => {
  const all: RehearsalRun[] = []
  const say = (line: string) => process.stdout.write(`${line}\n`)

  it.each(topologies().map((topology) => [topology.name, topology] as const))(
    'are right on %s, draining 1, 3, 10 % and a label',
    (_name, topology) => {
      const runs = Array.from({ length: RUNS }, (_, run) => runOf(topology, run)).flat()
      for (const run of runs) say(lineOf(run))
      all.push(...runs)
      expect(runs.filter((run) => !isRight(run))).toEqual([])
    },
  )

  it(`come within ${MEDIAN_SECONDS} s in the median, and leave live readings what they were`, () => {
    expect(all).toHaveLength(topologies().length * RUNS * 4)
    expect(median(all.map(({ seconds }) => seconds))).toBeLessThan(MEDIAN_SECONDS)
    // Where many cuts are about equally weak readings go up and down by more than that by themselves.
    const moved = (pick: (run: RehearsalRun) => number): number =>
      all.filter((run) => pick(run) > LIVE_WITHIN).length
    expect(moved(({ liveOff }) => liveOff)).toBeLessThanOrEqual(
      moved(({ aloneOff }) => aloneOff) + 0.1 * all.length,
    )
    const steady = all.filter(({ topology }) => !/random 8|preferential/.test(topology))
    expect(steady.filter(({ liveOff }) => liveOff > LIVE_WITHIN)).toEqual([])
  })

  afterAll(() => {
    for (const line of all.length > 0 ? summaryOf(all) : []) say(line)
  })
})
