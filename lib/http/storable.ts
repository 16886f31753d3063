import { AppError } from './app-error'

/** With the u flag a whole pair is one character and does not match. */
const HALF_A_PAIR = /\p{Surrogate}/u

/** PostgreSQL's text and JSON hold neither NUL nor half a surrogate pair; one such text would sink its whole batch. */
export function isStorable(value: unknown): boolean {
  switch (typeof value) {
    case 'string':
      return !value.includes('\0') && !HALF_A_PAIR.test(value)
    case 'object':
      if (value === null) return true
      return Object.entries(value).every(([key, inner]) => isStorable(key) && isStorable(inner))
    default:
      return true
  }
}

export function assertStorable(value: unknown): void {
  if (isStorable(value)) return
  throw new AppError('invalid-input', 'Some text holds a NUL or half a character. Send well-formed text.')
}
