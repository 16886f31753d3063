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

  /**
   * The likeliest so many pairs are guessed to be links. Of pairs with one score, where not all can be guessed, any are: what is right among
   * them is what to expect.
   * @returns share of guesses that are right
   */
  shareRight(isLink: (pair: Pair) => boolean, guesses: number): number {
    const pairs = [...allPairs(this.nodes)].map((pair) => ({
      score: this.scores[pair[0] * this.nodes + pair[1]]!,
      right: isLink(pair) ? 1 : 0,
    }))
    pairs.sort((one, other) => other.score - one.score)
    let right = 0
    for (let from = 0; from < guesses; ) {
      let to = from
      let rightHere = 0
      while (to < pairs.length && pairs[to]!.score === pairs[from]!.score) rightHere += pairs[to++]!.right
      right += rightHere * Math.min(1, (guesses - from) / (to - from))
      from = to
    }
    return right / guesses
  }
}

export const pairKey = ([a, b]: Pair): string => (a < b ? `${a}-${b}` : `${b}-${a}`)

export function* allPairs(nodes: number): Generator<Pair> {
  for (let a = 0; a < nodes; a++) for (let b = a + 1; b < nodes; b++) yield [a, b]
}
