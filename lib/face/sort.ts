import type { CsvValue } from './csv'

const collator = new Intl.Collator('en', { numeric: true, sensitivity: 'base' })

/** Orders numbers by size and text as people do (tar-2 before tar-10). */
export function compareCells(a: CsvValue, b: CsvValue): number {
  if (typeof a === 'number' && typeof b === 'number') return a - b
  return collator.compare(String(a ?? ''), String(b ?? ''))
}
