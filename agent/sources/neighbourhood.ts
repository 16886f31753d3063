import type { Directory } from '@/lib/protocol'
import type { Clock } from '../clock'
import type { Logger } from '../logger'
import { DirectoryWatch, type FetchDirectory } from './directory-watch'
import { afterLook, type KeptList, type Look, NOTHING_KEPT } from './kept-list'
import { keyOf, planNeighbours } from './plan'
import { type ResolvedNeighbour, resolveItems } from './resolve'
import type { AddressRule } from './rule'
import type { Source, SourceInit } from './source'

/** What of an agent is needed to keep its neighbours as the overlay has them. */
export interface NeighbourKeeper {
  /** Addresses and ids of agents that have answered. */
  answering(): ReadonlySet<string>
  addNeighbour(spec: { address?: string; agentId?: string }): void
  removeNeighbour(key: string): boolean
  setLinkQuality(key: string, quality: number): boolean
}

export interface NeighbourhoodComponents {
  clock: Clock
  logger: Logger
  keeper: NeighbourKeeper
  createSource: (init: SourceInit) => Source
  /** Asked only where the rule is the directory. */
  fetchDirectory: FetchDirectory
}

export interface NeighbourhoodInit {
  rule: AddressRule
  self: () => { agentId: string; address: string | null; node: string | null }
  /** Every so often, and whenever the list was looked at. */
  onFacts: (facts: NeighbourhoodFacts) => void
}

export interface NeighbourhoodFacts {
  kind: string
  error: string | null
  /** Neighbours without an agent, as far as can be told: none in the directory, or none that answers. */
  withoutAgent: number
  /** Those among them that are not even dialed, as no address follows. */
  unresolved: number
}

/** A neighbour that is new is given this long to answer before it counts as one without an agent. */
export const ANSWER_WAIT_MS = 30_000
const FACTS_EVERY_MS = 5_000

interface Held extends ResolvedNeighbour {
  sinceMs: number
}

/** Keeps an agent's neighbours as the overlay has them: source, rule, difference, agent. */
export class Neighbourhood {
  private readonly components: NeighbourhoodComponents
  private readonly init: NeighbourhoodInit
  private readonly source: Source
  private readonly directoryWatch: DirectoryWatch | null
  private kept: KeptList = NOTHING_KEPT
  private directory: Directory | null = null
  private directoryError: string | null = null
  private held = new Map<string, Held>()
  private unresolved = 0
  private cancelFacts = () => {}

  constructor(components: NeighbourhoodComponents, init: NeighbourhoodInit) {
    this.components = components
    this.init = init
    this.source = components.createSource({
      onList: (items) => this.take({ ok: true, items }),
      onFailure: (reason) => this.take({ ok: false, reason }),
    })
    const { clock, fetchDirectory } = components
    this.directoryWatch =
      init.rule.kind === 'directory'
        ? new DirectoryWatch(
            { clock, fetch: fetchDirectory },
            {
              onDirectory: (directory) => this.takeDirectory(directory),
              onFailure: (reason) => this.directoryFailed(reason),
            },
          )
        : null
  }

  start(): void {
    this.directoryWatch?.start()
    this.source.start()
    this.repeatFacts()
  }

  async stop(): Promise<void> {
    this.cancelFacts()
    await Promise.all([this.source.stop(), this.directoryWatch?.stop()])
  }

  get facts(): NeighbourhoodFacts {
    const { keeper, clock } = this.components
    const waitedSinceMs = clock.monotonicMs() - ANSWER_WAIT_MS
    const answering = keeper.answering()
    const silent = [...this.held].filter(
      ([key, { sinceMs }]) => sinceMs <= waitedSinceMs && !answering.has(key),
    )
    return {
      kind: this.source.kind,
      error: this.kept.error ?? this.directoryError,
      withoutAgent: this.unresolved + silent.length,
      unresolved: this.unresolved,
    }
  }

  private repeatFacts(): void {
    this.init.onFacts(this.facts)
    this.cancelFacts = this.components.clock.after(FACTS_EVERY_MS, () => this.repeatFacts())
  }

  private take(look: Look): void {
    const before = this.kept
    this.kept = afterLook(before, look)
    const { logger } = this.components
    const source = this.source.kind
    if (this.kept.error !== null && before.error === null)
      logger.warn({ source, reason: this.kept.error }, 'the list of neighbours stays as it was')
    if (this.kept.error === null && before.error !== null)
      logger.info({ source }, 'the list of neighbours is read again')
    if (look.ok) this.apply()
    this.init.onFacts(this.facts)
  }

  private takeDirectory(directory: Directory): void {
    this.directory = directory
    this.directoryError = null
    this.apply()
  }

  private directoryFailed(reason: string): void {
    if (this.directoryError === null)
      this.components.logger.warn({ reason }, 'the directory of agents stays as it was')
    this.directoryError = reason
  }

  private apply(): void {
    const { keeper, logger } = this.components
    const isReady = this.directoryWatch === null || this.directory !== null
    // Without a directory everyone would seem to be without an agent.
    if (this.kept.items === null || !isReady) return
    const init = { rule: this.init.rule, directory: this.directory, self: this.init.self() }
    const { neighbours, without } = resolveItems(this.kept.items, init)
    const plan = planNeighbours(this.held, neighbours)
    for (const key of plan.remove) keeper.removeNeighbour(key)
    for (const spec of plan.add) keeper.addNeighbour(spec)
    for (const { key, quality } of plan.quality) keeper.setLinkQuality(key, quality)
    const nowMs = this.components.clock.monotonicMs()
    this.held = new Map(
      neighbours.map((neighbour) => {
        const key = keyOf(neighbour)
        return [key, { ...neighbour, sinceMs: this.held.get(key)?.sinceMs ?? nowMs }]
      }),
    )
    if (plan.add.length + plan.remove.length > 0 || without.length !== this.unresolved)
      logger.info(
        { added: plan.add.length, removed: plan.remove.length, unresolved: without.length },
        'the neighbours follow the overlay’s list',
      )
    this.unresolved = without.length
  }
}
