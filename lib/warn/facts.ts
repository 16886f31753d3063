import type { Reading } from '@/lib/data/dto'

/** What rules look at, of one moment: a reading, or what is kept of a minute. */
export interface WarnFacts {
  atMs: number
  /** Nothing is concluded from figures of a reading that is not fresh; silence and coverage count at once. */
  isFresh: boolean
  /** The core reading. */
  lambda2: number | null
  usual: number | null
  level: Reading['level']
  treatAsSplit: boolean
  crossingLinks: number | null
  /** Nodes of the smaller side; null where no sides are told. */
  smallerSide: number | null
  joined: number
  heard: number
  linksKnown: number | null
  linksMeasured: number | null
  check: NonNullable<Reading['check']> | null
  leftOut: number
}

export function factsOf(reading: Reading): WarnFacts {
  const { lambda2, core, usual, level, treatAsSplit, crossingLinks, sides, coverage, check } = reading
  return {
    atMs: Date.parse(reading.at),
    isFresh: reading.data === 'fresh',
    lambda2: core?.lambda2 ?? lambda2,
    usual,
    level,
    treatAsSplit,
    crossingLinks,
    smallerSide: sides && Math.min(sides[0].nodes, sides[1].nodes),
    joined: coverage.joined,
    heard: coverage.heard,
    linksKnown: coverage.linksKnown,
    linksMeasured: coverage.linksMeasured,
    check: check ?? null,
    leftOut: coverage.leftOut ?? 0,
  }
}
