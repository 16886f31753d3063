import fc from 'fast-check'
import { expect, it } from 'vitest'
import type { Moment } from '@/lib/collector/moment'
import { numbersOf, packMoment, rangesOf, unpackNodes } from '@/lib/collector/moment-pack'

/** Without the zero below zero, whose sign no text keeps. */
const real = fc.float({ noNaN: true, noDefaultInfinity: true }).map((value) => value + 0)
const node = fc.record({
  number: fc.integer({ min: 1, max: 60 }),
  state: fc.constantFrom('heard' as const, 'unheard' as const, 'detached' as const),
  side: fc.constantFrom('a' as const, 'b' as const, null),
  value: fc.option(real),
  degree: fc.option(fc.nat(200)),
  weightedDegree: fc.option(real),
})

/** As the database gives arrays back. */
const arrayOf = (text: string): (number | null)[] =>
  text === '{}'
    ? []
    : text
        .slice(1, -1)
        .split(',')
        .map((part) => (part === 'NULL' ? null : Number(part)))

it('numbers of nodes come back from their ranges', () => {
  fc.assert(
    fc.property(fc.uniqueArray(fc.integer({ min: 1, max: 300 })), (numbers) => {
      const sorted = [...numbers].sort((a, b) => a - b)
      expect(numbersOf(rangesOf(sorted))).toEqual(sorted)
    }),
  )
  expect(rangesOf([1, 2, 3, 7, 9, 10])).toBe('{[1,4),[7,8),[9,11)}')
})

it('nodes come back from the columns of a moment, in whatever order they came', () => {
  fc.assert(
    fc.property(fc.uniqueArray(node, { selector: ({ number }) => number }), (nodes) => {
      const moment = {
        nodes: nodes.map((each) => ({ ...each, agentId: `agent-${each.number}`, name: '', labels: {} })),
        links: [],
      } as unknown as Moment
      const numbers = new Map(nodes.map(({ number }) => [`agent-${number}`, number]))
      const packed = packMoment(moment, numbers)
      const row = {
        ...packed,
        atMs: 0,
        links: [],
        values: arrayOf(packed.values),
        weightedDegrees: arrayOf(packed.weightedDegrees),
        degrees: arrayOf(packed.degrees),
      }
      expect(unpackNodes(row)).toEqual([...nodes].sort((a, b) => a.number - b.number))
    }),
  )
})

it('what four bytes cannot hold is not known, instead of sinking the row', () => {
  const of = (value: number) => ({
    nodes: [
      {
        agentId: 'one',
        name: 'tar-01',
        labels: {},
        state: 'heard' as const,
        side: null,
        value,
        degree: value,
        weightedDegree: value,
      },
    ],
    links: [],
  })
  const packed = packMoment(of(1e300) as unknown as Moment, new Map([['one', 4]]))
  expect(packed).toMatchObject({ values: '{NULL}', weightedDegrees: '{NULL}', degrees: '{2147483647}' })
  expect(packMoment(of(1e-300) as unknown as Moment, new Map([['one', 4]])).values).toBe('{0}')
})
