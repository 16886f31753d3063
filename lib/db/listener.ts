import { setTimeout as sleep } from 'node:timers/promises'
import pg from 'pg'

export const RECONNECT_FIRST_MS = 200
export const RECONNECT_LONGEST_MS = 5_000

/** The payload as sent, or null when the connection has (again) been made: something may have been missed. */
export type ListenFunction = (payload: string | null) => void

export interface ListenerComponents {
  /** Uniform in [0, 1). */
  random(): number
  warn(message: string, error: unknown): void
}

/** How long to wait before attempt number `attempt` (from 0), spread over half to the whole of the step. */
export function reconnectDelayMs(attempt: number, random: number): number {
  const step = Math.min(RECONNECT_LONGEST_MS, RECONNECT_FIRST_MS * 2 ** attempt)
  return step * (0.5 + random / 2)
}

/** One connection that listens for every channel this process wants to hear of. */
export class Listener {
  readonly #components: ListenerComponents
  readonly #url: string
  readonly #subscribers = new Map<string, Set<ListenFunction>>()
  #client: pg.Client | undefined
  #stopping = new AbortController()
  #running: Promise<void> | undefined

  constructor(components: ListenerComponents, init: { url: string }) {
    this.#components = components
    this.#url = init.url
  }

  start(): void {
    if (this.#running) return
    this.#stopping = new AbortController()
    this.#running = this.#run(this.#stopping.signal)
  }

  async stop(): Promise<void> {
    this.#stopping.abort()
    await this.#client?.end().catch(() => undefined)
    await this.#running
    this.#running = undefined
  }

  /** Resolves once the channel is being listened to, or at once while there is no connection. */
  async subscribe(channel: string, fn: ListenFunction, signal: AbortSignal): Promise<void> {
    if (signal.aborted) return
    const functions = this.#subscribers.get(channel) ?? new Set()
    const first = functions.size === 0
    // One entry per subscription, also where the same function subscribes twice.
    const entry: ListenFunction = (payload) => fn(payload)
    functions.add(entry)
    this.#subscribers.set(channel, functions)
    signal.addEventListener(
      'abort',
      () => {
        functions.delete(entry)
        if (functions.size > 0 || this.#subscribers.get(channel) !== functions) return
        this.#subscribers.delete(channel)
        this.#say(`unlisten ${pg.escapeIdentifier(channel)}`)
      },
      { once: true },
    )
    if (first) await this.#say(`listen ${pg.escapeIdentifier(channel)}`)
  }

  /** A failure here ends the connection, and the next one listens to everything again. */
  async #say(statement: string): Promise<void> {
    await this.#client?.query(statement).catch(() => undefined)
  }

  async #run(signal: AbortSignal): Promise<void> {
    let attempt = 0
    while (!signal.aborted) {
      try {
        const { client, ended } = await this.#connect()
        attempt = 0
        for (const functions of this.#subscribers.values()) for (const fn of functions) fn(null)
        if (signal.aborted) await client.end()
        await ended
        if (!signal.aborted) this.#components.warn('The database connection for notices has ended.', null)
      } catch (error) {
        if (!signal.aborted) this.#components.warn('Cannot listen to the database for notices.', error)
      }
      this.#client = undefined
      const delayMs = reconnectDelayMs(attempt++, this.#components.random())
      await sleep(delayMs, undefined, { signal }).catch(() => undefined)
    }
  }

  async #connect(): Promise<{ client: pg.Client; ended: Promise<void> }> {
    const client = new pg.Client({
      connectionString: this.#url,
      keepAlive: true,
      keepAliveInitialDelayMillis: 5_000,
      application_name: 'thinspan-listen',
    })
    const ended = new Promise<void>((resolve) => {
      client.on('end', resolve)
      client.on('error', () => resolve())
    })
    client.on('notification', ({ channel, payload }) => {
      for (const fn of this.#subscribers.get(channel) ?? []) fn(payload ?? '')
    })
    await client.connect()
    this.#client = client
    for (const channel of this.#subscribers.keys())
      await client.query(`listen ${pg.escapeIdentifier(channel)}`)
    return { client, ended }
  }
}
