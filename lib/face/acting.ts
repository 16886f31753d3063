import { ACTING_COOKIE } from '@/lib/auth/cookie'

/** Tells the other pages of a browser that another team was chosen. */
export const ACTING_CHANNEL = 'thinspan-acting'

const YEAR_SECONDS = 365 * 24 * 3600

/** Cookie text that keeps for which team somebody of several acts. Short names are letters, digits and hyphens. */
export function actingCookie(team: string): string {
  return `${ACTING_COOKIE}=${team}; path=/; max-age=${YEAR_SECONDS}; samesite=lax`
}
