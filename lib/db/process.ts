/**
 * What this process holds of the database: composition root. On globalThis, because the bundles of a web
 * process (instrumentation, pages, routes) do not share module state.
 */

import { Listener, type ListenFunction } from './listener'
import { acquireLock as acquire, type HeldLock, withLock } from './lock'
import { type EntityManager, type Orm, openOrm } from './orm'

/** Requests and rounds are short; what may take longer says so in its transaction. Migrations have no limit. */
export const STATEMENT_TIMEOUT_MS = 10_000
/** About as long as a stopped leader keeps its lead, so that whoever takes over finds its rows free. */
export const IDLE_IN_TRANSACTION_MS = 3_000

interface Held {
  orm?: Promise<Orm>
  listener?: Listener
}
const key = Symbol.for('thinspan.database')
const store = globalThis as { [key]?: Held }
store[key] ??= {}
const held: Held = store[key]

export function databaseUrl(): string {
  const url = process.env.DATABASE_URL
  if (!url) throw new Error('Set DATABASE_URL, or start with "npm start", which brings a database along.')
  return url
}

export function getOrm(): Promise<Orm> {
  if (!held.orm) {
    const opening = openOrm(databaseUrl(), undefined, {
      statementMs: STATEMENT_TIMEOUT_MS,
      idleInTransactionMs: IDLE_IN_TRANSACTION_MS,
    })
    held.orm = opening
    // A failure must not be remembered: the database may be there at the next request.
    opening.catch(() => {
      if (held.orm === opening) held.orm = undefined
    })
  }
  return held.orm
}

/** A manager for one request or one piece of work. */
export async function forkEm(): Promise<EntityManager> {
  return (await getOrm()).em.fork()
}

function getListener(): Listener {
  held.listener ??= new Listener(
    {
      random: Math.random,
      warn: (message, error) =>
        console.warn(JSON.stringify({ level: 'warn', message, error: error ? String(error) : null })),
    },
    { url: databaseUrl() },
  )
  held.listener.start()
  return held.listener
}

/** Hears `channel` until `signal` aborts, over the one listening connection of this process. */
export function subscribe(channel: string, fn: ListenFunction, signal: AbortSignal): Promise<void> {
  return getListener().subscribe(channel, fn, signal)
}

export function acquireLock(lockKey: string, signal: AbortSignal): Promise<HeldLock> {
  return acquire({ url: databaseUrl() }, lockKey, signal)
}

/** Runs `run` as the only one on the server who works on this overlay. */
export function withOverlayLock<T>(
  overlayId: string,
  signal: AbortSignal,
  run: (signal: AbortSignal) => Promise<T>,
): Promise<T> {
  return withLock({ url: databaseUrl() }, overlayLockKey(overlayId), signal, run)
}

export function overlayLockKey(overlayId: string): string {
  return `overlay:${overlayId}`
}

export async function closeDatabase(): Promise<void> {
  const { orm, listener } = held
  held.orm = undefined
  held.listener = undefined
  await listener?.stop()
  await (await orm?.catch(() => undefined))?.close(true)
}
