import type { Look } from './looks'
import { PairScores } from './pairs'

/** Rows of the regression are scaled to a spread of 1; this keeps it solvable where they say little. */
const RIDGE = 1e-3
/** Rows are taken in so many at a time: what is multiplied with each other stays close at hand. */
const ROWS = 64

/**
 * Regression of every node's energies on all nodes' means: ½ Σⱼ wᵢⱼ(z̄ᵢʳ−z̄ⱼʳ)(z̄ᵢˢ−z̄ⱼˢ) is linear in the weights wᵢⱼ, which least
 * squares finds from enough looks (normal equations, by Cholesky's method). A pair's score is what both its ends find.
 * @param looks by look, then by node
 */
export function scoreByRegression(nodes: number, looks: readonly (readonly (Look | null)[])[]): PairScores {
  const scores = new PairScores(nodes)
  for (let node = 0; node < nodes; node++) {
    const weights = weightsOf(node, nodes, looks)
    for (let index = 0; index < weights.length; index++)
      scores.add(node, index < node ? index : index + 1, weights[index]!)
  }
  return scores
}

function weightsOf(node: number, nodes: number, looks: readonly (readonly (Look | null)[])[]): Float64Array {
  const equations = new NormalEquations(nodes - 1)
  const row = new Float64Array(nodes - 1)
  for (const look of looks) {
    const own = look[node]
    if (!own) continue
    const size = own.means.length
    let at = 0
    for (let r = 0; r < size; r++)
      for (let s = r; s < size; s++) {
        const energy = own.energies[at++]
        if (energy === undefined) continue
        let square = 0
        for (let index = 0; index < nodes - 1; index++) {
          const peer = look[index < node ? index : index + 1]
          const value =
            peer?.means.length === size
              ? ((own.means[r]! - peer.means[r]!) * (own.means[s]! - peer.means[s]!)) / 2
              : 0
          row[index] = value
          square += value * value
        }
        equations.add(row, energy, Math.sqrt(square) || 1)
      }
  }
  return equations.solve()
}

/** (XᵀX + RIDGE) w = Xᵀy, of rows that come one after the other. */
class NormalEquations {
  private readonly size: number
  /** Lower triangle, row after row in full width. */
  private readonly normal: Float64Array
  private readonly right: Float64Array
  /** Rows that wait, unknown after unknown. */
  private readonly block: Float64Array
  private readonly values = new Float64Array(ROWS)
  private waiting = 0

  constructor(size: number) {
    this.size = size
    this.normal = new Float64Array(size * size)
    this.right = new Float64Array(size)
    this.block = new Float64Array(size * ROWS)
    for (let a = 0; a < size; a++) this.normal[a * size + a] = RIDGE
  }

  add(row: Float64Array, value: number, spread: number): void {
    for (let a = 0; a < this.size; a++) this.block[a * ROWS + this.waiting] = row[a]! / spread
    this.values[this.waiting] = value / spread
    this.waiting += 1
    if (this.waiting === ROWS) this.takeIn()
  }

  private takeIn(): void {
    const { size, block, normal, right, values, waiting } = this
    for (let a = 0; a < size; a++) {
      const from = a * ROWS
      let sum = 0
      for (let row = 0; row < waiting; row++) sum += block[from + row]! * values[row]!
      right[a] = right[a]! + sum
      for (let b = 0; b <= a; b++) {
        const other = b * ROWS
        let product = 0
        for (let row = 0; row < waiting; row++) product += block[from + row]! * block[other + row]!
        normal[a * size + b] = normal[a * size + b]! + product
      }
    }
    this.waiting = 0
  }

  /** Uses the equations up. */
  solve(): Float64Array {
    this.takeIn()
    const { size, normal, right } = this
    for (let a = 0; a < size; a++) {
      for (let b = 0; b <= a; b++) {
        let sum = normal[a * size + b]!
        for (let c = 0; c < b; c++) sum -= normal[a * size + c]! * normal[b * size + c]!
        normal[a * size + b] = a === b ? Math.sqrt(sum) : sum / normal[b * size + b]!
      }
      let sum = right[a]!
      for (let c = 0; c < a; c++) sum -= normal[a * size + c]! * right[c]!
      right[a] = sum / normal[a * size + a]!
    }
    for (let a = size - 1; a >= 0; a--) {
      let sum = right[a]!
      for (let c = a + 1; c < size; c++) sum -= normal[c * size + a]! * right[c]!
      right[a] = sum / normal[a * size + a]!
    }
    return right
  }
}
