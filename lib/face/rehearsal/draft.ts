import type { Excluded, NewRehearsal } from '@/lib/data/rehearsal-dto'
import { formatMoment } from '../time'
import type { SoonWindow } from './windows'

/** A rehearsal as the form has it. */
export interface Draft {
  exclude: Excluded
  note: string
  incident: number | null
  /** "now", "at", or the id of the window before which it is to begin. */
  when: string
  /** Local date and time, for "at". */
  at: string
}

/** What the server is asked for; or what is still to be said. */
export function askedOf(
  { exclude, note, incident, when, at }: Draft,
  windows: readonly SoonWindow[],
  nowMs: number,
): { asked: NewRehearsal } | { missing: string } {
  const base = { exclude, note: note.trim() === '' ? null : note.trim(), incident }
  if (when === 'now') return { asked: { ...base, startsAt: null } }
  if (when !== 'at') {
    const aheadAt = windows.find(({ id }) => id === when)?.aheadAt
    return aheadAt
      ? { asked: { ...base, startsAt: aheadAt } }
      : { missing: 'That window is too near to begin ahead of it. Start now instead.' }
  }
  // Without a zone it is the reader's own.
  const atMs = Date.parse(at)
  if (Number.isNaN(atMs)) return { missing: 'Give the day and time it is to begin.' }
  if (atMs <= nowMs) return { missing: 'Give a time that is still to come.' }
  return { asked: { ...base, startsAt: new Date(atMs).toISOString() } }
}

/** The choices of when, with those windows that are far enough away. */
export function whenOptions(
  windows: readonly SoonWindow[],
  nowMs: number,
): { value: string; label: string }[] {
  return [
    { value: 'now', label: 'now' },
    ...windows.flatMap(({ id, reason, aheadAt }) =>
      aheadAt
        ? [{ value: id, label: `${formatMoment(Date.parse(aheadAt), nowMs)}: half an hour before ${reason}` }]
        : [],
    ),
    { value: 'at', label: 'at another time' },
  ]
}
