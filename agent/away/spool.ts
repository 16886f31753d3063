import type { AwaySummary } from '@/lib/protocol'
import type { Clock } from '../clock'
import type { Logger } from '../logger'
import { type AwayEntry, entriesOf, summarise, textOf, withEntry } from './away-log'
import type { SpoolStore } from './spool-store'

/** Nothing reached the collector for this many intervals: it is away. Asking neighbours takes some of them. */
export const AWAY_AFTER_INTERVALS = 6
/** How often the state of the links is noted while nothing happens to them. */
export const AWAY_FACTS_MS = 60_000
/** How often the store is written at most. */
export const SPOOL_WRITE_MS = 5_000

export interface SpoolComponents {
  clock: Clock
  logger: Logger
  /** Without one, what is kept is lost with the program. */
  store?: SpoolStore
  /** The collector's time. */
  nowMs: () => number
}

export interface SpoolInit {
  links: () => { live: number; known: number }
  /** Whether neighbours may be named. */
  mayName: () => boolean
}

/** Coarse facts of the links while nothing reaches the collector, until they can be told. */
export class Spool {
  private readonly components: SpoolComponents
  private readonly init: SpoolInit
  private entries: AwayEntry[] = []
  private told = new Set<AwayEntry>()
  private away = false
  private notedAtMs = 0
  private writtenAtMs = Number.NEGATIVE_INFINITY
  private isDirty = false
  private writing: Promise<void> = Promise.resolve()
  private fault: string | null = null

  constructor(components: SpoolComponents, init: SpoolInit) {
    this.components = components
    this.init = init
  }

  get isAway(): boolean {
    return this.away
  }

  /** Why the store does not keep it; null while it does. */
  get error(): string | null {
    return this.fault
  }

  get count(): number {
    return this.entries.length
  }

  /** Takes up what the last run could not tell. */
  async load(): Promise<void> {
    const { store } = this.components
    if (!store) return
    try {
      const text = await store.read()
      if (text !== null) this.entries = [...entriesOf(text), ...this.entries]
    } catch (error) {
      this.complain(error)
    }
  }

  /** After every report: whether it, or one before it within the last intervals, got through by any way. */
  note(isAway: boolean): void {
    if (!isAway) {
      this.away = false
      return
    }
    const { clock } = this.components
    if (!this.away) this.add('away')
    else if (clock.monotonicMs() - this.notedAtMs >= AWAY_FACTS_MS) this.add('facts')
    this.away = true
    this.keep()
  }

  noteLink(event: 'link-up' | 'link-down', peer: string): void {
    if (this.away) this.add(event, peer)
  }

  /** What to tell with the next report; empty when there is nothing. */
  summary(): AwaySummary[] {
    this.told = new Set(this.entries)
    return summarise(this.entries)
  }

  /** The last summary was told. What happened since is told with the next. */
  clear(): void {
    if (this.told.size === 0) return
    this.entries = this.entries.filter((entry) => !this.told.has(entry))
    this.told.clear()
    this.isDirty = this.entries.length > 0
    const { store } = this.components
    if (store) this.writing = this.writing.then(() => store.remove()).catch((error) => this.complain(error))
  }

  /** Writes what is not written yet. */
  async stop(): Promise<void> {
    this.writtenAtMs = Number.NEGATIVE_INFINITY
    this.keep()
    await this.writing
  }

  private add(event: AwayEntry['event'], peer?: string): void {
    const { clock, nowMs } = this.components
    const at = new Date(nowMs()).toISOString()
    const named = peer !== undefined && this.init.mayName() ? { peer } : {}
    this.entries = withEntry(this.entries, { at, event, ...this.init.links(), ...named })
    this.notedAtMs = clock.monotonicMs()
    this.isDirty = true
  }

  private keep(): void {
    const { store, clock } = this.components
    const nowMs = clock.monotonicMs()
    if (!store || !this.isDirty || nowMs - this.writtenAtMs < SPOOL_WRITE_MS) return
    this.isDirty = false
    this.writtenAtMs = nowMs
    const text = textOf(this.entries)
    this.writing = this.writing
      .then(() => store.write(text))
      .then(() => {
        this.fault = null
      })
      .catch((error) => this.complain(error))
  }

  /** Said once: a disk that is full stays full for a while. */
  private complain(error: unknown): void {
    const reason = error instanceof Error ? error.message : String(error)
    if (this.fault === null)
      this.components.logger.warn({ reason }, 'what happens while the collector is away is not kept on disk')
    this.fault = `the spool cannot be kept: ${reason}`
  }
}
