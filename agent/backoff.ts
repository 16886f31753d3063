import type { Random } from '@/lib/method/random'

export interface Backoff {
  baseMs: number
  capMs: number
}

export const DIAL_BACKOFF: Backoff = { baseMs: 250, capMs: 30_000 }

/** Wait before attempt `failures` + 1: doubling to the cap, each drawn between half and the whole of it. */
export function backoffMs(failures: number, { baseMs, capMs }: Backoff, random: Random): number {
  const whole = Math.min(capMs, baseMs * 2 ** Math.min(failures, 30))
  return whole * (0.5 + random.uniform() / 2)
}
