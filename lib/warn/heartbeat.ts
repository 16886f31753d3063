import { type Clock, sleep } from '@/lib/collector/clock'
import { epochMs, query } from '@/lib/collector/query'
import type { EntityManager } from '@/lib/db'
import type { Log } from '@/lib/http/runtime'
import { pulse } from '@/lib/notify/pulse'

export const HEARTBEAT_EVERY_MS = 60_000
/** Evaluating and sending must both have come round since. */
export const ALIVE_MS = 90_000
const TIMEOUT_MS = 15_000

export interface HeartbeatComponents {
  forkEm(): Promise<EntityManager>
  now(): Date
  clock: Clock
  log: Log
  /** As the web's own; redirects are not followed. */
  fetch(url: string, init: RequestInit): Promise<Pick<Response, 'ok' | 'status'>>
}

export interface Pulses {
  evaluatingMs: number | null
  sendingMs: number | null
  /** When the address outside last took the heartbeat. */
  heartbeatMs: number | null
}

/** When rules were last evaluated and the outbox last looked through, by any process; null for never. */
export async function readPulses(em: EntityManager): Promise<Pulses> {
  const rows = await query<{ what: string; atMs: number }>(
    em,
    `select what, ${epochMs('at')} as "atMs" from watch_pulses`,
  )
  const of = (what: string) => rows.find((row) => row.what === what)?.atMs ?? null
  return { evaluatingMs: of('evaluating'), sendingMs: of('sending'), heartbeatMs: of('heartbeat') }
}

export function isAlive({ evaluatingMs, sendingMs }: Omit<Pulses, 'heartbeatMs'>, nowMs: number): boolean {
  return [evaluatingMs, sendingMs].every((atMs) => atMs !== null && nowMs - atMs <= ALIVE_MS)
}

/**
 * Calls an address outside for as long as warnings work: whoever watches it hears of it when this server, its evaluation or its
 * sending stands still. Silence is the alarm, so nothing is sent when something is wrong.
 */
export class Heartbeat {
  readonly #components: HeartbeatComponents
  readonly #url: string
  #stopping = new AbortController()
  #running: Promise<void> | null = null

  constructor(components: HeartbeatComponents, init: { url: string }) {
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
    await this.#running
    this.#running = null
  }

  /** @returns whether it was called and answered */
  async beat(signal: AbortSignal): Promise<boolean> {
    const { forkEm, now, log, fetch } = this.#components
    try {
      const em = await forkEm()
      const pulses = await readPulses(em)
      if (!isAlive(pulses, now().getTime())) {
        log.warn({ ...pulses }, 'no heartbeat: evaluating or sending stands still')
        return false
      }
      const { ok, status } = await fetch(this.#url, {
        redirect: 'manual',
        signal: AbortSignal.any([signal, AbortSignal.timeout(TIMEOUT_MS)]),
      })
      if (ok) await pulse(em, 'heartbeat', now())
      else log.warn({ status }, 'the heartbeat was not taken')
      return ok
    } catch (error) {
      if (!signal.aborted) log.warn({ err: error }, 'the heartbeat could not be sent')
      return false
    }
  }

  async #run(signal: AbortSignal): Promise<void> {
    while (!signal.aborted) {
      await this.beat(signal)
      await sleep(this.#components.clock, HEARTBEAT_EVERY_MS, signal)
    }
  }
}
