import Papa from 'papaparse'
import { describe, expect, it } from 'vitest'
import { csvFileName, toCsv } from '@/lib/face/csv'
import { compareCells } from '@/lib/face/sort'

describe('CSV', () => {
  it('quotes commas, quotes and line breaks so that they come back as they were', () => {
    const rows = [['a,b', 'say "no"', 'two\nlines', 1.5]] as const
    const parsed = Papa.parse<string[]>(toCsv(['w', 'x', 'y', 'z'], rows), { skipEmptyLines: true }).data
    expect(parsed).toEqual([
      ['w', 'x', 'y', 'z'],
      ['a,b', 'say "no"', 'two\nlines', '1.5'],
    ])
  })

  it('defuses text that a spreadsheet would run', () => {
    const risky = ['=1+1', '+SUM(A1)', '-cmd', '@x', '\t=1', '\r=1']
    const text = toCsv(
      ['name'],
      risky.map((r) => [r]),
    )
    const parsed = Papa.parse<string[]>(text, { skipEmptyLines: true }).data.slice(1)
    expect(parsed.map((r) => r[0])).toEqual(risky.map((r) => `'${r}`))
  })

  it('leaves negative numbers numbers and nothing known empty', () => {
    expect(toCsv(['value', 'heard'], [[-0.42, null]])).toBe('value,heard\r\n-0.42,\r\n')
  })

  it('keeps the header when there are no rows', () => {
    expect(toCsv(['name'], [])).toBe('name\r\n')
  })

  it('names files plainly', () => {
    expect(csvFileName('Harbour Line', 'nodes')).toBe('harbour-line-nodes.csv')
    expect(csvFileName('../..')).toBe('table.csv')
  })
})

describe('sorting', () => {
  it('orders numbers by size and names as people count', () => {
    expect([10, 2, -1].sort(compareCells)).toEqual([-1, 2, 10])
    expect(['tar-10', 'tar-2', 'Tar-1'].sort(compareCells)).toEqual(['Tar-1', 'tar-2', 'tar-10'])
  })
})
