/** Which pairs of nodes may be linked. */
export interface PairRules {
  /** By node: false where it may get no link. Null: all may. */
  mayLink: readonly boolean[] | null
  /** By node: two with the same entry are not linked, and one with null is linked to nobody. Null: no such rule. */
  groups: readonly (string | null)[] | null
  /** Links a node may have in the end. Null: any number. */
  mostDegree: number | null
}

export const ANY_PAIR: PairRules = { mayLink: null, groups: null, mostDegree: null }

export interface PairsInit {
  nodes: number
  rules: PairRules
  /** Links of each node now; one that is not known counts as 0. */
  degrees: ArrayLike<number>
  /** Pairs that are linked, as far as is known. */
  linked: Iterable<readonly [a: number, b: number]>
}

/** The pairs that may still be linked, as links are taken one after the other. */
export class Pairs {
  readonly nodes: number
  readonly #rules: PairRules
  readonly #degrees: Float64Array
  readonly #linked = new Set<number>()

  constructor({ nodes, rules, degrees, linked }: PairsInit) {
    this.nodes = nodes
    this.#rules = rules
    this.#degrees = Float64Array.from(degrees)
    for (const [a, b] of linked) this.#linked.add(this.#key(a, b))
  }

  #key(a: number, b: number): number {
    return a < b ? a * this.nodes + b : b * this.nodes + a
  }

  /** Nodes that may get one more link. */
  open(): number[] {
    const { mayLink, groups, mostDegree } = this.#rules
    return Array.from({ length: this.nodes }, (_, node) => node).filter(
      (node) =>
        mayLink?.[node] !== false &&
        (groups === null || groups[node] != null) &&
        (mostDegree === null || this.#degrees[node]! < mostDegree),
    )
  }

  /** For two of `open`: whether they are no pair already and the rules allow it. */
  allows(a: number, b: number): boolean {
    const { groups } = this.#rules
    return a !== b && (groups === null || groups[a] !== groups[b]) && !this.#linked.has(this.#key(a, b))
  }

  take(a: number, b: number): void {
    this.#linked.add(this.#key(a, b))
    this.#degrees[a]! += 1
    this.#degrees[b]! += 1
  }
}
