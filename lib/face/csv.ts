import Papa from 'papaparse'

export type CsvValue = string | number | null

/**
 * RFC 4180 text of a table. Text that a spreadsheet would run as a formula (it begins with = + - @, tab or
 * carriage return) is given an apostrophe; numbers stay numbers.
 */
export function toCsv(header: readonly string[], rows: readonly (readonly CsvValue[])[]): string {
  return `${Papa.unparse([[...header], ...rows.map((row) => [...row])], { escapeFormulae: true, newline: '\r\n' })}\r\n`
}

/** A file name from the pieces of its meaning: "harbourline-nodes.csv". */
export function csvFileName(...pieces: string[]): string {
  const slug = pieces
    .join('-')
    .toLowerCase()
    .replace(/[^a-z0-9]+/g, '-')
    .replace(/^-+|-+$/g, '')
  return `${slug || 'table'}.csv`
}
