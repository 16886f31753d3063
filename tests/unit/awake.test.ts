import { expect, it } from 'vitest'
import { awakeMs } from '../support/processes/awake'

/** Every 25 ms, but for one that came three seconds late. */
const TICKS_MS = [0, 25, 50, 3_075, 3_100, 3_125]

it.each([
  ['all of it, where ticks are on time', 0, 50, 50],
  ['all but what a late tick was held up', 0, 3_125, 3_125 - 2_925],
  ['none of a part in which nothing ran', 1_000, 2_000, 0],
  ['the end of that part and what follows', 3_000, 3_100, 25],
  ['all that lies before the first tick or after the last', -500, 25, 525],
  ['all that lies after the last tick', 3_125, 9_125, 6_000],
])('the time awake is %s', (_, fromMs, toMs, wanted) => {
  expect(awakeMs(TICKS_MS, fromMs, toMs)).toBe(wanted)
})
