import type { NodeItem, Source, SourceInit } from './source'

/** A list that does not change. */
export class ListSource implements Source {
  readonly kind = 'list'
  private readonly items: readonly NodeItem[]
  private readonly init: SourceInit
  private isStopped = false

  constructor(items: readonly string[], init: SourceInit) {
    this.items = items.map((node) => ({ node, quality: null }))
    this.init = init
  }

  start(): void {
    queueMicrotask(() => this.isStopped || this.init.onList(this.items))
  }

  async stop(): Promise<void> {
    this.isStopped = true
  }
}
