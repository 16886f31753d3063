import { AVERAGING_INTERVALS, type Colony } from '../node/colony'
import type { Arrival } from '../node/take-in'
import { type HeardColony, LEAST_AGE_INTERVALS } from './arrivals'

/** What a frame brought, colony by colony. The sender's averaging window is taken to be as old as one's own. */
export function heardColonies(
  arrivals: readonly Arrival[],
  colonies: ReadonlyMap<number, Colony>,
  { nowMs, intervalMs }: { nowMs: number; intervalMs: number },
): HeardColony[] {
  const heard: HeardColony[] = []
  // A loop without copies: this runs for every frame of every link.
  for (const { colony: slot, seeding, x, y, mean, refused } of arrivals) {
    const colony = colonies.get(slot)
    if (!colony) continue
    const walks = !refused && !colony.refuses && !colony.orders.still
    const ageMs = nowMs - colony.adoptedAtMs
    heard.push({
      colony: slot,
      seeding,
      x,
      y,
      mean,
      windowMs: Math.max(1, Math.min(AVERAGING_INTERVALS * intervalMs, ageMs / 2)),
      counts: walks && ageMs >= LEAST_AGE_INTERVALS * intervalMs,
    })
  }
  return heard
}
