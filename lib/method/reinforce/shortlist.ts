import type { Pairs } from './pairs'

export interface ScoredPair {
  a: number
  b: number
  score: number
}

export interface Shortlist {
  /** Best first; of equal ones the first found. */
  pairs: ScoredPair[]
  /** No pair left out has a higher score; 0 where none was left out. */
  restAtMost: number
}

/** The `most` best of all pairs that may be linked. O(n²) scores, and a sort each time that twice as many are held. */
export function shortlist(pairs: Pairs, most: number, score: (a: number, b: number) => number): Shortlist {
  const open = pairs.open()
  let held: ScoredPair[] = []
  let floor = Number.NEGATIVE_INFINITY
  let restAtMost = 0
  const trim = () => {
    held.sort((x, y) => y.score - x.score)
    const out = held[most]
    if (!out) return
    held = held.slice(0, most)
    floor = held[most - 1]!.score
    restAtMost = Math.max(restAtMost, out.score)
  }
  for (let i = 0; i < open.length; i++) {
    const a = open[i]!
    for (let j = i + 1; j < open.length; j++) {
      const b = open[j]!
      const is = score(a, b)
      if (is <= floor) {
        if (is > restAtMost && pairs.allows(a, b)) restAtMost = is
        continue
      }
      if (!pairs.allows(a, b)) continue
      held.push({ a, b, score: is })
      if (held.length >= 2 * most) trim()
    }
  }
  trim()
  return { pairs: held, restAtMost }
}
