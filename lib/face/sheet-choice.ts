export const SHEET_COOKIE = 'thinspan-sheet'
export const SHEET_CHOICES = ['system', 'day', 'night'] as const
export type SheetChoice = (typeof SHEET_CHOICES)[number]

/** Anything but a known choice follows the system. */
export function parseSheetChoice(value: string | undefined): SheetChoice {
  return SHEET_CHOICES.find((c) => c === value) ?? 'system'
}

/** Cookie text that keeps a choice for a year; following the system needs no cookie. */
export function sheetCookie(choice: SheetChoice): string {
  const maxAgeSeconds = choice === 'system' ? 0 : 365 * 24 * 3600
  return `${SHEET_COOKIE}=${choice}; path=/; max-age=${maxAgeSeconds}; samesite=lax`
}
