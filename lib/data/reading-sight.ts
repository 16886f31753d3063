import { type VerdictFacts, verdictOf } from '@/lib/collector/verdict'
import type { Reading } from './dto'
import type { Sight } from './sight'

/**
 * A reading as a reader may see it. What is said in it is said anew from the facts that were kept with it; none were
 * while all nodes were of the owning team, and then its own readings are as they were.
 */
export function sightedReading(reading: Reading, facts: VerdictFacts | undefined, sight: Sight): Reading {
  if (sight.isWhole || (!facts && sight.isOwners)) return reading
  const parts = reading.parts?.map((part) => withLabelSeen(part, sight))
  if (facts) return { ...reading, ...verdictOf(sightedFacts(facts, sight)), ...(parts && { parts }) }
  const verdict = reading.treatAsSplit ? 'Treat as split. Nodes fell silent together.' : reading.verdict
  return { ...reading, verdict, detail: '', ...(parts && { parts }) }
}

function sightedFacts(facts: VerdictFacts, sight: Sight): VerdictFacts {
  const { follows, leftOut, loose, parts, treatAsSplit } = facts
  return {
    ...facts,
    follows: follows && sight.seesKey(follows.key) ? follows : null,
    leftOut: leftOut?.map(({ name, because }) => ({ name: sight.named(name), because })),
    loose: loose?.map((end) => ({ ...end, names: end.names.map((name) => sight.named(name)).sort() })),
    parts: parts?.map((part) => withLabelSeen(part, sight)),
    treatAsSplit: treatAsSplit && togetherSeen(treatAsSplit, sight),
  }
}

function togetherSeen(
  together: NonNullable<VerdictFacts['treatAsSplit']>,
  sight: Sight,
): VerdictFacts['treatAsSplit'] {
  const { nodes } = together
  switch (together.by) {
    case 'label':
      return sight.seesKey(together.key) ? together : { by: 'hidden-label', nodes }
    case 'cut':
      // Of which label they are the values is not known here.
      return { ...together, where: [] }
    case 'hidden-label':
      return together
  }
}

type Part = NonNullable<Reading['parts']>[number]

function withLabelSeen(part: Part, sight: Sight): Part {
  return { ...part, label: part.label && sight.seesKey(part.label.key) ? part.label : null }
}
