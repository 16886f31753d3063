import Papa from 'papaparse'
import type { TopologyProblem } from './problems'

export interface Row {
  line: number
  cells: string[]
}

/** Cells trimmed, blank lines left out, line numbers kept (a quoted cell may span lines). */
export function readRows(text: string): { rows: Row[]; problems: TopologyProblem[] } {
  const content = text.startsWith('\uFEFF') ? text.slice(1) : text
  const rows: Row[] = []
  const problems: TopologyProblem[] = []
  let line = 1
  let at = 0
  Papa.parse<string[]>(content, {
    delimiter: ',',
    step: ({ data, errors, meta }) => {
      const cells = data.map((cell) => cell.trim())
      for (const error of errors) problems.push({ line, code: 'malformed-csv', detail: error.message })
      if (errors.length === 0 && cells.some((cell) => cell !== '')) rows.push({ line, cells })
      line += content.slice(at, meta.cursor).match(/\r\n|\n|\r/g)?.length ?? 0
      at = meta.cursor
    },
  })
  return { rows, problems }
}

// biome-ignore lint/suspicious/noControlCharactersInRegex: control characters are what it looks for
const NODE_NAME = /^[^\u0000-\u001f\u007f]{1,120}$/u

export function isNodeName(name: string): boolean {
  // graphology keeps neighbours in plain objects, where 'constructor' or '__proto__' is always taken.
  return NODE_NAME.test(name) && !(name in Object.prototype)
}
