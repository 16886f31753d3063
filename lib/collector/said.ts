/** A text in parts, so that each reader gets the names that are for them. */
import type { EventDraft } from './judge'

/** Words; a node, by its name; or what only the team of a node reads. */
export type Piece = string | { node: string } | { of: string; text: string }
export type Said = readonly Piece[]

/** With every name and all that is said. */
export function plain(said: Said): string {
  return said
    .map((piece) => (typeof piece === 'string' ? piece : 'node' in piece ? piece.node : piece.text))
    .join('')
}

/** What happened, with its parts where they name anybody. */
export function eventOf(kind: EventDraft['kind'], said: Said): EventDraft {
  const named = said.some((piece) => typeof piece !== 'string')
  return { kind, text: plain(said), ...(named && { said }) }
}

/** "A", "A and B", "A, B and C"; beyond `most` "A, B and 4 more": as `listOf`. */
export function saidList(items: readonly Said[], most = 4): Said {
  const shown = items.length > most ? items.slice(0, most - 1) : items
  const rest = items.length - shown.length
  const parts = rest > 0 ? [...shown, [`${rest} more`]] : shown
  return parts.flatMap((part, index) => {
    if (index === 0) return part
    return [index === parts.length - 1 ? ' and ' : ', ', ...part]
  })
}

export const nodesList = (names: readonly string[], most?: number): Said =>
  saidList(
    names.map((name) => [{ node: name }]),
    most,
  )
