/** What a series of means says of the hours to come. */
export interface Fall {
  /** A significant fall by the Mann–Kendall test, corrected for autocorrelation. */
  falls: boolean
  /** Two-sided p of the test. */
  p: number
  /** Theil–Sen slope, λ₂ per hour. */
  slopePerHour: number
  /** When the line meets the floor, milliseconds since 1970; null where it does not. */
  floorAtMs: number | null
  /** That the floor is reached within the hours asked for, 0 to 1. */
  probability: number
}
