/** `table[i][j]`: how many things have value i of one and value j of the other. Rows of one length. */
export type Table = readonly (readonly number[])[]

const sum = (numbers: readonly number[]): number => numbers.reduce((total, number) => total + number, 0)
export const rowSums = (table: Table): number[] => table.map(sum)
export const columnSums = (table: Table): number[] =>
  (table[0] ?? []).map((_, column) => sum(table.map((row) => row[column] ?? 0)))

/** Entropy of a partition into classes of these sizes, nats. */
export function entropy(sizes: readonly number[]): number {
  const all = sum(sizes)
  return -sum(sizes.filter((size) => size > 0).map((size) => (size / all) * Math.log(size / all)))
}

/** Mutual information of the two partitions that a table crosses, nats; 0 for an empty table. */
export function mutualInformation(table: Table): number {
  const [rows, columns] = [rowSums(table), columnSums(table)]
  const all = sum(rows)
  let information = 0
  for (const [i, row] of table.entries())
    for (const [j, count] of row.entries())
      if (count > 0) information += (count / all) * Math.log((all * count) / (rows[i]! * columns[j]!))
  return Math.max(0, information)
}

/**
 * The mutual information to be expected, nats, where the classes of two partitions have these sizes and chance alone says who is in
 * which: each cell of the table is hypergeometric (N. X. Vinh, J. Epps and J. Bailey, "Information theoretic measures for clusterings
 * comparison", J. Mach. Learn. Res. 11, 2010; formula from memory). Both lists must have one sum.
 */
export function expectedInformation(rows: readonly number[], columns: readonly number[]): number {
  const all = sum(rows)
  const logs = logFactorials(all)
  const log = (n: number): number => logs[n]!
  let expected = 0
  for (const a of rows)
    for (const b of columns) {
      const fixed = log(a) + log(b) + log(all - a) + log(all - b) - log(all)
      for (let n = Math.max(1, a + b - all); n <= Math.min(a, b); n++) {
        const chance = Math.exp(fixed - log(n) - log(a - n) - log(b - n) - log(all - a - b + n))
        expected += (n / all) * Math.log((all * n) / (a * b)) * chance
      }
    }
  return expected
}

function logFactorials(most: number): Float64Array {
  const logs = new Float64Array(most + 1)
  for (let n = 1; n <= most; n++) logs[n] = logs[n - 1]! + Math.log(n)
  return logs
}

/** Under this no table with the same class sizes could say more than chance does. */
const NOTHING_TO_SAY = 1e-12

/**
 * Adjusted mutual information, at most 1 and 0 on average where only chance connects the two: (MI − E)/(min(H₁, H₂) − E), Vinh, Epps and
 * Bailey 2010 with the *min* normaliser. Of its normalisers this is the one that is 1 for every partition that refines the other:
 * a cut between two pairs of offices follows the offices, though there are four of them.
 */
export function adjustedInformation(table: Table): number {
  const [rows, columns] = [rowSums(table), columnSums(table)]
  const expected = expectedInformation(rows, columns)
  const range = Math.min(entropy(rows), entropy(columns)) - expected
  return range > NOTHING_TO_SAY ? (mutualInformation(table) - expected) / range : 0
}
