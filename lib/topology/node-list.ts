import type { TopologyProblem } from './problems'
import { isNodeName, type Row, readRows } from './rows'

export type Labels = Record<string, string>

export type NodeListResult =
  | { ok: true; nodes: Map<string, Labels> }
  | { ok: false; problems: TopologyProblem[] }

const LABEL_KEY = /^[a-z][a-z0-9._-]{0,39}$/i

/**
 * Reads CSV with a header `name,<label key>,…` and one node per line; an empty cell is no label.
 * All problems are reported, in the order of their lines.
 */
export function parseNodeList(text: string): NodeListResult {
  const { rows, problems } = readRows(text)
  const [header, ...rest] = rows
  if (header?.cells[0]?.toLowerCase() !== 'name')
    return { ok: false, problems: [...problems, { line: header?.line ?? 1, code: 'missing-header' }] }
  const keys = header.cells.slice(1)
  problems.push(...headerProblems(header.line, keys))
  const nodes = new Map<string, Labels>()
  const lineOf = new Map<string, number>()
  for (const row of rest) {
    const problem = problemOf(row, keys.length + 1, lineOf)
    if (problem) {
      problems.push(problem)
      continue
    }
    const name = row.cells[0]!
    lineOf.set(name, row.line)
    const pairs = keys.map((key, index) => [key, row.cells[index + 1] ?? ''] as const)
    nodes.set(name, Object.fromEntries(pairs.filter(([, value]) => value !== '')))
  }
  if (problems.length === 0) return { ok: true, nodes }
  return { ok: false, problems: problems.sort((a, b) => a.line - b.line) }
}

function headerProblems(line: number, keys: readonly string[]): TopologyProblem[] {
  return keys.flatMap((key, index): TopologyProblem[] => {
    if (!LABEL_KEY.test(key)) return [{ line, code: 'bad-label-key', key }]
    return keys.indexOf(key) < index ? [{ line, code: 'duplicate-label-key', key }] : []
  })
}

function problemOf(row: Row, columns: number, lineOf: ReadonlyMap<string, number>): TopologyProblem | null {
  const { line, cells } = row
  const name = cells[0]!
  if (cells.length > columns)
    return {
      line,
      code: 'wrong-columns',
      found: cells.length,
      expected: `at most ${columns}, as in the header`,
    }
  if (name === '') return { line, code: 'missing-name', column: 'name' }
  if (!isNodeName(name)) return { line, code: 'bad-name', name }
  const firstLine = lineOf.get(name)
  return firstLine === undefined ? null : { line, code: 'duplicate-node', name, firstLine }
}
