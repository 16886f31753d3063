import { randomInt } from 'node:crypto'
import { tryPort } from '@/scripts/lib/ports.mjs'

/** The first of ten. Not of those that systems hand out for outgoing connections: free some seconds later as well. */
export async function tenFreePorts(): Promise<number> {
  for (;;) {
    const first = 10 * randomInt(2_000, 3_000)
    const free = await Promise.all([1, 2, 3].map((n) => tryPort(first + n)))
    if (free.every((port) => port !== null)) return first
  }
}
