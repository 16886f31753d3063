import type { Cut } from '@/lib/data/dto'
import type { WeakPlace } from '@/lib/data/weak-dto'

/** The cut as the stretch view takes it. */
export function asCut({ at, sides, withheld, crossing, links, follows }: WeakPlace): Cut {
  const exact = follows.labels.find(({ exactly }) => exactly !== null)
  return {
    at,
    sides,
    withheld: withheld?.sentence ?? null,
    crossingLinks: crossing?.links ?? null,
    crossingWeight: crossing?.weight ?? null,
    links,
    follows: exact?.exactly ? { key: exact.key, ...exact.exactly } : null,
  }
}
