import type { NodeItem } from './source'

/**
 * An empty list after one with entries is believed at this many looks in a row: a node that is starting again knows
 * nobody for a moment, and that must not take the overlay's links down.
 */
export const EMPTY_LOOKS = 3

/** What is held of a source: the last list that was believed, and how the looks since went. */
export interface KeptList {
  items: readonly NodeItem[] | null
  emptyLooks: number
  /** Why the last look failed; null while they succeed. */
  error: string | null
}

export const NOTHING_KEPT: KeptList = { items: null, emptyLooks: 0, error: null }

export type Look = { ok: true; items: readonly NodeItem[] } | { ok: false; reason: string }

export function afterLook(kept: KeptList, look: Look): KeptList {
  if (!look.ok) return { ...kept, error: look.reason }
  const hadSome = kept.items !== null && kept.items.length > 0
  if (look.items.length > 0 || !hadSome) return { items: look.items, emptyLooks: 0, error: null }
  const emptyLooks = kept.emptyLooks + 1
  if (emptyLooks >= EMPTY_LOOKS) return { items: [], emptyLooks: 0, error: null }
  return {
    ...kept,
    emptyLooks,
    error: `the list is empty; it is believed if it stays so (look ${emptyLooks} of ${EMPTY_LOOKS})`,
  }
}
