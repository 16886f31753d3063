/** One line of `check`. */
export interface Finding {
  what: string
  ok: boolean
  /** What is so, or what is wrong. */
  says: string
  /** What to do about it; null where all is well. */
  remedy: string | null
}

export const good = (what: string, says: string): Finding => ({ what, ok: true, says, remedy: null })
export const bad = (what: string, says: string, remedy: string): Finding => ({
  what,
  ok: false,
  says,
  remedy: remedy === '' ? null : remedy,
})

export function findingLine({ what, ok, says, remedy }: Finding): string {
  return `${ok ? 'ok   ' : 'wrong'}  ${what}: ${says}${remedy ? ` ${remedy}` : ''}`
}
