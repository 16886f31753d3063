import { UndirectedGraph } from 'graphology'
import type { TopologyProblem } from './problems'
import { isNodeName, type Row, readRows } from './rows'

export interface LinkAttributes {
  weight: number
}

export type TopologyGraph = UndirectedGraph<Record<string, never>, LinkAttributes>

export type EdgeListResult = { ok: true; graph: TopologyGraph } | { ok: false; problems: TopologyProblem[] }

const COLUMNS = 'source,target or source,target,weight'

/**
 * Reads CSV `source,target[,weight]`, one undirected link per line, 0 < weight ≤ 1 and 1 where left out;
 * a first line that says so in words is skipped. All problems are reported, in the order of their lines.
 */
export function parseEdgeList(text: string): EdgeListResult {
  const { rows, problems } = readRows(text)
  const graph: TopologyGraph = new UndirectedGraph()
  const lineOf = new Map<string, number>()
  const links = rows[0] && isHeader(rows[0]) ? rows.slice(1) : rows
  for (const row of links) {
    const found = problemsOf(row)
    problems.push(...found)
    if (found.length > 0) continue
    const [source, target, weight] = [row.cells[0]!, row.cells[1]!, row.cells[2]]
    const key = JSON.stringify([source, target].sort())
    const firstLine = lineOf.get(key)
    if (firstLine !== undefined) {
      problems.push({ line: row.line, code: 'duplicate-link', source, target, firstLine })
      continue
    }
    lineOf.set(key, row.line)
    graph.mergeNode(source)
    graph.mergeNode(target)
    graph.addEdge(source, target, { weight: weightOf(weight) })
  }
  if (links.length === 0 && problems.length === 0) problems.push({ line: 1, code: 'no-links' })
  if (problems.length === 0) return { ok: true, graph }
  return { ok: false, problems: problems.sort((a, b) => a.line - b.line) }
}

function isHeader({ cells }: Row): boolean {
  const [source, target, weight, ...rest] = cells.map((cell) => cell.toLowerCase())
  return source === 'source' && target === 'target' && (weight ?? 'weight') === 'weight' && rest.length === 0
}

function problemsOf({ line, cells }: Row): TopologyProblem[] {
  if (cells.length < 2 || cells.length > 3)
    return [{ line, code: 'wrong-columns', found: cells.length, expected: COLUMNS }]
  const problems: TopologyProblem[] = []
  for (const [index, column] of ['source', 'target'].entries()) {
    const name = cells[index]!
    if (name === '') problems.push({ line, code: 'missing-name', column })
    else if (!isNodeName(name)) problems.push({ line, code: 'bad-name', name })
  }
  if (cells[0] === cells[1] && cells[0] !== '') problems.push({ line, code: 'self-loop', name: cells[0]! })
  const weight = weightOf(cells[2])
  if (!(weight > 0 && weight <= 1)) problems.push({ line, code: 'bad-weight', weight: cells[2]! })
  return problems
}

// Number() alone would take '0x1' and '1e0 ' and read '' as 0.
const DECIMAL = /^[0-9]*\.?[0-9]+(e[+-]?[0-9]+)?$/i

function weightOf(cell: string | undefined): number {
  if (cell === undefined || cell === '') return 1
  return DECIMAL.test(cell) ? Number(cell) : Number.NaN
}
