import pg from 'pg'

/**
 * A stopped or unreachable holder loses its session, and with it its locks, after this long: by the database's clock, as
 * hosts share no other. With a look every half second another leads within 3 s, and a reading is missed for less than 5.
 */
export const LOCK_SESSION_TIMEOUT_MS = 2_500
export const LOCK_HEARTBEAT_MS = 500
const WAIT_SLICE_MS = 1_000
/** PostgreSQL's code for a lock not obtained within lock_timeout. */
const LOCK_NOT_AVAILABLE = '55P03'

export interface LockSettings {
  url: string
  sessionTimeoutMs?: number
  heartbeatMs?: number
}

/**
 * Advisory locks on a connection of their own. `lost` aborts when the connection ends for whatever reason:
 * from then on another process may hold the locks.
 */
export class LockSession {
  readonly #client: pg.Client
  readonly #heartbeatMs: number
  readonly #lost = new AbortController()
  readonly #held = new Set<string>()
  #timer: NodeJS.Timeout | undefined

  constructor(settings: LockSettings) {
    this.#heartbeatMs = settings.heartbeatMs ?? LOCK_HEARTBEAT_MS
    // A dead host would keep its lock until TCP gives up (hours by default), and a stopped process for ever:
    // keepalives end the one, the idle limit with a heartbeat the other.
    this.#client = new pg.Client({
      connectionString: settings.url,
      keepAlive: true,
      application_name: 'thinspan-lock',
      options: [
        `-c idle_session_timeout=${settings.sessionTimeoutMs ?? LOCK_SESSION_TIMEOUT_MS}`,
        '-c tcp_keepalives_idle=2 -c tcp_keepalives_interval=1 -c tcp_keepalives_count=3',
        `-c lock_timeout=${WAIT_SLICE_MS}`,
      ].join(' '),
    })
    this.#client.on('error', () => this.#end())
    this.#client.on('end', () => this.#end())
  }

  get lost(): AbortSignal {
    return this.#lost.signal
  }

  async start(): Promise<void> {
    await this.#client.connect()
    this.#timer = setInterval(() => {
      this.#client.query('select 1').catch(() => this.#end())
    }, this.#heartbeatMs)
    this.#timer.unref()
  }

  async tryAcquire(key: string): Promise<boolean> {
    if (this.#held.has(key)) return true
    const { rows } = await this.#client.query<{ got: boolean }>(
      'select pg_try_advisory_lock(hashtextextended($1, 0)) as got',
      [lockName(key)],
    )
    const got = rows[0]?.got === true
    if (got) this.#held.add(key)
    return got
  }

  /** Waits in the database's queue. Waiting holds up the session's other calls. */
  async acquire(key: string, signal: AbortSignal): Promise<void> {
    while (!this.#held.has(key)) {
      signal.throwIfAborted()
      try {
        await this.#client.query('select pg_advisory_lock(hashtextextended($1, 0))', [lockName(key)])
        this.#held.add(key)
      } catch (error) {
        if (!(error instanceof pg.DatabaseError && error.code === LOCK_NOT_AVAILABLE)) throw error
      }
    }
  }

  async release(key: string): Promise<void> {
    if (!this.#held.delete(key) || this.lost.aborted) return
    await this.#client.query('select pg_advisory_unlock(hashtextextended($1, 0))', [lockName(key)])
  }

  async stop(): Promise<void> {
    const running = !this.lost.aborted
    this.#end()
    if (running) await this.#client.end()
  }

  #end(): void {
    clearInterval(this.#timer)
    this.#held.clear()
    if (!this.#lost.signal.aborted)
      this.#lost.abort(new Error('The database connection that held the lock has ended.'))
  }
}

export interface HeldLock {
  /** Aborts when the lock may be gone. */
  lost: AbortSignal
  release(): Promise<void>
}

/** Waits for the lock `key` on a connection of its own until it is held or `signal` aborts. */
export async function acquireLock(
  settings: LockSettings,
  key: string,
  signal: AbortSignal,
): Promise<HeldLock> {
  const session = new LockSession(settings)
  try {
    await session.start()
    await session.acquire(key, signal)
  } catch (error) {
    await session.stop()
    throw error
  }
  return { lost: session.lost, release: () => session.stop() }
}

/** Runs `run` while holding the lock; the signal it is given aborts when the lock is lost or `signal` aborts. */
export async function withLock<T>(
  settings: LockSettings,
  key: string,
  signal: AbortSignal,
  run: (signal: AbortSignal) => Promise<T>,
): Promise<T> {
  const lock = await acquireLock(settings, key, signal)
  try {
    return await run(AbortSignal.any([signal, lock.lost]))
  } finally {
    await lock.release()
  }
}

function lockName(key: string): string {
  return `thinspan:${key}`
}
