/** Two readings a minute are looked at. */
export const SAMPLE_MS = 30_000
