import { expect, it } from 'vitest'
import { columnsOf, fromColumns } from '@/lib/collector/reading-columns'

const none = { lambda2: null, low: null, high: null, core: null }
const whole = { lambda2: 0.9, low: 0.8, high: 1, core: null }
const cored = { ...whole, core: { lambda2: 2.8, low: 2.7, high: 2.9 } }

it.each([
  ['of the whole', whole, 0.9],
  ['of a core beside the whole', cored, 2.8],
  ['that is withheld', none, null],
])('a reading %s is stored by its headline and read back as it was', (_, reading, headline) => {
  const columns = columnsOf(reading)
  expect(columns.headline.lambda2).toBe(headline)
  expect(fromColumns(columns.headline, columns.whole)).toEqual(reading)
})

it('of rows from before cores were told apart has none', () => {
  expect(fromColumns({ lambda2: 0.9, low: 0.8, high: 1 }, undefined)).toEqual(whole)
})
