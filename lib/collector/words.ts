/** "1 node", "3 nodes". */
export function countOf(count: number, noun: string): string {
  return `${count} ${noun}${count === 1 ? '' : 's'}`
}

/** "A", "A and B", "A, B and C"; beyond `most` "A, B and 4 more". */
export function listOf(names: readonly string[], most = 4): string {
  const shown = names.length > most ? names.slice(0, most - 1) : names
  const rest = names.length - shown.length
  const parts = rest > 0 ? [...shown, `${rest} more`] : [...shown]
  const last = parts.pop()
  if (last === undefined) return ''
  return parts.length === 0 ? last : `${parts.join(', ')} and ${last}`
}

export function isOrAre(count: number): 'is' | 'are' {
  return count === 1 ? 'is' : 'are'
}
