/** Why a line of an uploaded topology cannot be used; `line` counts from 1. */
export type TopologyProblem = { line: number } & (
  | { code: 'malformed-csv'; detail: string }
  | { code: 'wrong-columns'; found: number; expected: string }
  | { code: 'missing-name'; column: string }
  | { code: 'bad-name'; name: string }
  | { code: 'self-loop'; name: string }
  | { code: 'duplicate-link'; source: string; target: string; firstLine: number }
  | { code: 'bad-weight'; weight: string }
  | { code: 'no-links' }
  | { code: 'missing-header' }
  | { code: 'bad-label-key'; key: string }
  | { code: 'duplicate-label-key'; key: string }
  | { code: 'duplicate-node'; name: string; firstLine: number }
)

/** One sentence that says what is wrong and what to do. */
export function describeTopologyProblem(problem: TopologyProblem): string {
  return `Line ${problem.line}: ${sentence(problem)}`
}

function sentence(problem: TopologyProblem): string {
  switch (problem.code) {
    case 'malformed-csv':
      return `this is not well-formed CSV (${problem.detail}); check the quotes.`
    case 'wrong-columns':
      return `has ${problem.found} ${problem.found === 1 ? 'column' : 'columns'}; expected ${problem.expected}.`
    case 'missing-name':
      return `the column "${problem.column}" is empty; give a node name.`
    case 'bad-name':
      return `"${problem.name.slice(0, 60)}" cannot be a node name; take another of 1 to 120 characters without control characters.`
    case 'self-loop':
      return `"${problem.name}" is linked to itself; remove the line.`
    case 'duplicate-link':
      return `${problem.source} – ${problem.target} is already on line ${problem.firstLine}; links have no direction, so keep one of the two.`
    case 'bad-weight':
      return `the weight "${problem.weight.slice(0, 60)}" is not a number above 0 and at most 1.`
    case 'no-links':
      return 'no link found; give one "source,target" per line.'
    case 'missing-header':
      return 'the first line must be a header that starts with "name".'
    case 'bad-label-key':
      return `"${problem.key.slice(0, 60)}" cannot be a label; use a letter, then up to 39 letters, digits, "-", "_" or ".".`
    case 'duplicate-label-key':
      return `the label "${problem.key}" appears twice in the header.`
    case 'duplicate-node':
      return `the node "${problem.name}" is already on line ${problem.firstLine}.`
  }
}
