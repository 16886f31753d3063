import { type Clock, sleep } from './clock'
import { REMOVAL_MS } from './link/link-contract'
import type { LinkStatus } from './link/link-status'

/** What taking leave asks of the links. */
export interface DepartingLinks {
  status(): LinkStatus[]
  removeNeighbour(key: string): boolean
}

/** Takes every link down, walkers first. @returns whether all were settled before the time for it was over */
export async function depart(
  { links, clock }: { links: DepartingLinks; clock: Clock },
  { tickMs }: { tickMs: number },
  signal: AbortSignal,
): Promise<boolean> {
  for (const { peer, address } of links.status()) {
    const key = peer ?? address
    if (key !== null) links.removeNeighbour(key)
  }
  const untilMs = clock.monotonicMs() + REMOVAL_MS + 2 * tickMs
  while (links.status().some(({ up }) => up)) {
    if (clock.monotonicMs() >= untilMs || !(await sleep(clock, tickMs, signal))) return false
  }
  return true
}
