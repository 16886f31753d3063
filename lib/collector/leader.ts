import { type EntityManager, LockSession, type LockSettings, overlayLockKey } from '@/lib/db'
import type { Log } from '@/lib/http/runtime'
import { forkRandom, type Random } from '@/lib/method/random'
import type { Reckoner } from '@/lib/reckon'
import { type Clock, sleep } from './clock'
import { ExactCheck } from './exact'
import { findLed, LeaderStore } from './leader-store'
import { Moments } from './moments'
import { LEADERS_CHANNEL, ORDERS_CHANNEL } from './notices'
import { PlannedLinks } from './planned'
import { Term } from './term'
import { Upkeep } from './upkeep'
import { Usual } from './usual'

/** How often to look for overlays without a leader: also how long one can be without after a leader ended. */
export const LOOK_MS = 500
/** While it cannot lead it says so this often, not at every look. */
const SAY_AGAIN_MS = 30_000

export interface LeaderComponents {
  forkEm(): Promise<EntityManager>
  subscribe(channel: string, fn: (payload: string | null) => void, signal: AbortSignal): Promise<void>
  clock: Clock
  random: Random
  log: Log
  /** Works out what would hold this thread up. */
  reckon: Reckoner['reckon']
  /** A name nobody else has, for each term. */
  newHolder(): string
}

/** Leads the overlays that nobody else leads. One connection holds this process's locks. */
export class Leader {
  readonly #components: LeaderComponents
  readonly #lock: LockSettings
  readonly #terms = new Map<string, { term: Term; done: Promise<void> }>()
  /** What ended terms leave behind: looks at the usual that are not over. */
  readonly #left = new Set<Promise<void>>()
  #stopping = new AbortController()
  #running: Promise<void> | null = null
  #wake: () => void = () => {}
  #count = 0

  constructor(components: LeaderComponents, init: LockSettings) {
    this.#components = components
    this.#lock = init
  }

  /** Ids of the overlays led now, and how long their rounds take. */
  get led(): { overlayId: string; rounds: Term['rounds'] }[] {
    return [...this.#terms].map(([overlayId, { term }]) => ({ overlayId, rounds: { ...term.rounds } }))
  }

  start(): void {
    if (this.#running) return
    this.#stopping = new AbortController()
    const { signal } = this.#stopping
    const { subscribe } = this.#components
    void subscribe(LEADERS_CHANNEL, () => this.#wake(), signal)
    void subscribe(ORDERS_CHANNEL, (overlayId) => this.#hasten(overlayId), signal)
    this.#running = this.#run(signal)
  }

  async stop(): Promise<void> {
    this.#stopping.abort()
    await this.#running
    this.#running = null
  }

  /** @param overlayId null after a lost connection: any may have been meant */
  #hasten(overlayId: string | null): void {
    for (const [led, { term }] of this.#terms) if (overlayId === null || overlayId === led) term.hasten()
  }

  async #run(signal: AbortSignal): Promise<void> {
    const { clock, log } = this.#components
    let saidMs = Number.NEGATIVE_INFINITY
    while (!signal.aborted) {
      const session = new LockSession(this.#lock)
      try {
        await session.start()
        saidMs = Number.NEGATIVE_INFINITY
        await this.#lead(session, AbortSignal.any([signal, session.lost]))
      } catch (error) {
        if (!signal.aborted && clock.monotonicMs() - saidMs >= SAY_AGAIN_MS) {
          saidMs = clock.monotonicMs()
          log.warn({ err: error }, 'cannot lead at the moment; tries again every half second')
        }
      }
      await session.stop().catch(() => undefined)
      if (!signal.aborted) await sleep(clock, LOOK_MS, signal)
    }
  }

  async #lead(session: LockSession, signal: AbortSignal): Promise<void> {
    const { forkEm, clock } = this.#components
    // Whatever ends the looking ends the terms as well.
    const scope = new AbortController()
    const end = () => {
      scope.abort()
      this.#wake()
    }
    signal.addEventListener('abort', end, { once: true })
    try {
      while (!signal.aborted) {
        for (const overlayId of await findLed(await forkEm())) {
          if (signal.aborted || this.#terms.has(overlayId)) continue
          if (await session.tryAcquire(overlayLockKey(overlayId)))
            this.#begin(overlayId, session, scope.signal)
        }
        const woken = new AbortController()
        this.#wake = () => woken.abort()
        if (!signal.aborted) await sleep(clock, LOOK_MS, woken.signal)
      }
    } finally {
      signal.removeEventListener('abort', end)
      scope.abort()
      await Promise.all([...this.#terms.values()].map(({ done }) => done))
      await Promise.all(this.#left)
    }
  }

  #begin(overlayId: string, session: LockSession, signal: AbortSignal): void {
    const { forkEm, clock, random, log, reckon, newHolder } = this.#components
    const holder = newHolder()
    const store = new LeaderStore({ forkEm }, { overlayId, holder })
    const upkeep = new Upkeep({ forkEm, clock }, { overlayId, holder })
    const moments = new Moments({ forkEm }, { overlayId, holder })
    const planned = new PlannedLinks({ forkEm }, { overlayId, holder })
    const exact = new ExactCheck({ reckon })
    const usual = new Usual({ forkEm, clock, log }, { overlayId })
    const components = {
      store,
      usual,
      upkeep,
      moments,
      planned,
      exact,
      clock,
      random: forkRandom(random, this.#count++),
      log,
    }
    const term = new Term(components, { overlayId })
    const done = this.#serve(term, overlayId, session, signal).then(() => {
      const left = usual.stop().finally(() => this.#left.delete(left))
      this.#left.add(left)
    })
    this.#terms.set(overlayId, { term, done })
    log.info({ overlayId }, 'leading')
  }

  async #serve(term: Term, overlayId: string, session: LockSession, signal: AbortSignal): Promise<void> {
    const { log } = this.#components
    const end = await term.run(signal).catch((error: unknown) => {
      if (!signal.aborted) log.error({ overlayId, err: error }, 'leading failed')
      return 'failing'
    })
    await session.release(overlayLockKey(overlayId)).catch(() => undefined)
    this.#terms.delete(overlayId)
    log.info({ overlayId, end }, 'no longer leading')
  }
}
