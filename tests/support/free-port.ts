import { tryPort } from '@/scripts/lib/ports.mjs'

const FIRST = 10_000
const BLOCKS = 1_000
const PORTS_PER_BLOCK = 10
const POOLS = 4
let asked = 0

/**
 * A free port of 127.0.0.1 that stays free: not of those that systems hand out for port 0 and for outgoing connections,
 * and of a block that no other process or thread of the tests takes from.
 */
export async function freePort(): Promise<number> {
  const pool = Number(process.env.VITEST_POOL_ID ?? 0) % POOLS
  const block = (process.pid * POOLS + pool) % BLOCKS
  for (let tried = 0; tried < PORTS_PER_BLOCK; tried++) {
    const port = FIRST + block * PORTS_PER_BLOCK + (asked++ % PORTS_PER_BLOCK)
    if ((await tryPort(port)) !== null) return port
  }
  throw new Error(`No port from ${FIRST + block * PORTS_PER_BLOCK} on is free.`)
}
