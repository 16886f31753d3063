import { afterAll, describe, expect, it } from 'vitest'
import { LEAST_HEARD } from '@/lib/method/control/coverage'
import { type SilentCourse, type SilentInit, silentCourse } from '../support/silent-course'

const SEEDS = Number(process.env.THINSPAN_SOAK_RUNS ?? 2)
const SHARES = [0.01, 0.1, 0.33]
const LOSSES = [0.05, 0.15, 0.3]
/** From the silence to a reading without the silent, and from their return to one with them. */
const MOST_INTERVALS = 25
/** From λ₂, in the mean of half a minute, once all are back. */
const MOST_OFF = 0.03

type Row = Omit<SilentInit, 'seed'> & { courses: SilentCourse[] }

const grid = (['named', 'sealed'] as const).flatMap((disclosure) =>
  SHARES.flatMap((silent) =>
    (['ended', 'unheard'] as const).flatMap((how) =>
      LOSSES.map((loss) => ({ disclosure, silent, how, loss })),
    ),
  ),
)

describe('an overlay of 60 at steady pace in which agents fall silent for two minutes, and requests are lost', () => {
  const rows: Row[] = []

  it.each(grid)('$disclosure: $silent of it $how, $loss lost', (init) => {
    const courses = Array.from({ length: SEEDS }, (_, seed) => silentCourse({ ...init, seed: seed + 1 }))
    rows.push({ ...init, courses })
    process.stdout.write(`${lineOf({ ...init, courses })}\n`)
    for (const { againAfter, end, backAfter, after } of courses) {
      if (1 - init.silent < LEAST_HEARD) expect(end).toBeNull()
      else expect(againAfter ?? Number.POSITIVE_INFINITY).toBeLessThanOrEqual(MOST_INTERVALS)
      expect(backAfter ?? Number.POSITIVE_INFINITY).toBeLessThanOrEqual(MOST_INTERVALS)
      expect(Math.abs(after ?? Number.POSITIVE_INFINITY)).toBeLessThan(MOST_OFF)
    }
  })

  afterAll(() => {
    for (const line of [HEAD, ...rows.map(lineOf)]) process.stdout.write(`${line}\n`)
  })
})

/** before, without: share of the time without a fresh reading; again, back: intervals; worst, end, after: off the exact λ₂. The worst of the seeds. */
const HEAD =
  'disclosure silent how      lost  before        again  without    worst      end        back    after'

function lineOf({ disclosure, silent, how, loss, courses }: Row): string {
  const most = (of: (course: SilentCourse) => number | null): number | null => {
    const all = courses.map(of)
    return all.includes(null) ? null : Math.max(...all.map(Number))
  }
  const farthest = (of: (course: SilentCourse) => number | null): number | null => {
    const [first] = courses.flatMap((course) => of(course) ?? []).sort((a, b) => Math.abs(b) - Math.abs(a))
    return first ?? null
  }
  const percent = (value: number | null, digits = 0): string =>
    value === null ? '–' : `${(100 * value).toFixed(digits)} %`
  return [
    disclosure.padEnd(10),
    percent(silent).padStart(6),
    how.padEnd(8),
    percent(loss).padStart(4),
    percent(most(({ withoutBefore }) => withoutBefore)).padStart(7),
    String(most(({ againAfter }) => againAfter) ?? '–').padStart(12),
    percent(most(({ withoutReading }) => withoutReading)).padStart(8),
    percent(
      farthest(({ worst }) => worst),
      1,
    ).padStart(8),
    percent(
      farthest(({ end }) => end),
      1,
    ).padStart(8),
    String(most(({ backAfter }) => backAfter) ?? '–').padStart(11),
    percent(
      farthest(({ after }) => after),
      1,
    ).padStart(8),
  ].join(' ')
}
