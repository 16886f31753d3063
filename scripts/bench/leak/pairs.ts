import type { Random } from '@/lib/method/random'

export type Pair = readonly [a: number, b: number]

/** A score for every pair of nodes, higher where a link is likelier. */
export class PairScores {
  readonly nodes: number
  private readonly scores: Float64Array

  constructor(nodes: number) {
    this.nodes = nodes
    this.scores = new Float64Array(nodes * nodes)
  }

  add(a: number, b: number, score: number): void {
    const at = Math.min(a, b) * this.nodes + Math.max(a, b)
    this.scores[at] = this.scores[at]! + score
  }

  /** The likeliest pairs, likeliest first. Equal ones come by chance: their order must not say anything. */
  best(count: number, random: Random): Pair[] {
    const pairs: { pair: Pair; score: number; lot: number }[] = []
    for (let a = 0; a < this.nodes; a++)
      for (let b = a + 1; b < this.nodes; b++)
        pairs.push({ pair: [a, b], score: this.scores[a * this.nodes + b]!, lot: random.uniform() })
    pairs.sort((one, other) => other.score - one.score || one.lot - other.lot)
    return pairs.slice(0, count).map(({ pair }) => pair)
  }
}

export const pairKey = ([a, b]: Pair): string => (a < b ? `${a}-${b}` : `${b}-${a}`)

export function* allPairs(nodes: number): Generator<Pair> {
  for (let a = 0; a < nodes; a++) for (let b = a + 1; b < nodes; b++) yield [a, b]
}
