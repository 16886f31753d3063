import { Matrix, solve } from 'ml-matrix'
import type { Looks } from './looks'

type Pair = [a: number, b: number]

/** Rows of the regression are scaled to a spread of 1; this keeps it solvable where they say little. */
const RIDGE = 1e-3

/**
 * Regression of every node's energies on all nodes' means: ½ Σⱼ wᵢⱼ(z̄ᵢʳ−z̄ⱼʳ)(z̄ᵢˢ−z̄ⱼˢ) is linear in the weights wᵢⱼ, which least
 * squares finds from enough looks. The pairs with the largest weights, of both ends together, are named.
 */
export function namedByRegression({ nodes, sums }: Looks, links: number): Pair[] {
  const weights = new Map<string, number>()
  for (let node = 0; node < nodes; node++) {
    const others = Array.from({ length: nodes }, (_, index) => index).filter((index) => index !== node)
    const normal = Matrix.eye(others.length, others.length).mul(RIDGE)
    const right = Matrix.zeros(others.length, 1)
    for (const look of sums) {
      const own = look[node]
      if (!own) continue
      const size = own.means.length
      let at = 0
      for (let r = 0; r < size; r++)
        for (let s = r; s < size; s++) {
          const energy = own.energies[at++]
          if (energy === undefined) continue
          const row = others.map((other) => {
            const peer = look[other]
            if (peer?.means.length !== size) return 0
            return ((own.means[r]! - peer.means[r]!) * (own.means[s]! - peer.means[s]!)) / 2
          })
          const spread = Math.hypot(...row) || 1
          addRow(
            normal,
            right,
            row.map((value) => value / spread),
            energy / spread,
          )
        }
    }
    const found = solve(normal, right)
    others.forEach((other, index) => {
      const key = node < other ? `${node}-${other}` : `${other}-${node}`
      weights.set(key, (weights.get(key) ?? 0) + found.get(index, 0))
    })
  }
  return topPairs(weights, links)
}

function addRow(normal: Matrix, right: Matrix, row: readonly number[], value: number): void {
  for (let a = 0; a < row.length; a++) {
    const first = row[a]!
    if (first === 0) continue
    right.set(a, 0, right.get(a, 0) + first * value)
    for (let b = 0; b < row.length; b++) normal.set(a, b, normal.get(a, b) + first * row[b]!)
  }
}

/** Pairs whose disclosed values move together from look to look, or simply lie near each other. */
export function namedByValues(
  { nodes, values }: Looks,
  links: number,
  by: 'covariance' | 'nearness',
): Pair[] {
  const series = Array.from({ length: nodes }, (_, node) => values.map((look) => look[node] ?? 0))
  const steps = series.map((one) => one.slice(1).map((value, index) => value - one[index]!))
  const mean = series.map((one) => one.reduce((sum, value) => sum + value, 0) / Math.max(1, one.length))
  const scores = new Map<string, number>()
  for (let a = 0; a < nodes; a++)
    for (let b = a + 1; b < nodes; b++) {
      const together = steps[a]!.reduce((sum, step, index) => sum + step * steps[b]![index]!, 0)
      const size = Math.hypot(...steps[a]!) * Math.hypot(...steps[b]!)
      const score = by === 'covariance' ? (size > 0 ? together / size : -1) : -Math.abs(mean[a]! - mean[b]!)
      scores.set(`${a}-${b}`, score)
    }
  return topPairs(scores, links)
}

function topPairs(scores: ReadonlyMap<string, number>, count: number): Pair[] {
  const sorted = [...scores].sort((a, b) => b[1] - a[1]).slice(0, count)
  return sorted.map(([key]): Pair => {
    const [a, b] = key.split('-').map(Number)
    return [a!, b!]
  })
}
