/** Names of time zones. Safe to import in the browser. */
import { z } from 'zod'

/** A name of the IANA tz database that this runtime knows; offsets such as "+01:00" are none, as they know no summer. */
export function isZone(name: string): boolean {
  if (!/^[A-Za-z]/.test(name)) return false
  try {
    new Intl.DateTimeFormat('en-GB', { timeZone: name })
    return true
  } catch {
    return false
  }
}

export const zoneSchema = z.string().refine(isZone, 'Choose a time zone by its name, as Europe/London.')
