/** A neighbour as the overlay itself knows it. */
export interface NodeItem {
  /** Host, host:port, name or address. */
  node: string
  /** The node's own view of the link, 0 (down) to 1; null where it says nothing. */
  quality: number | null
}

export type ReadResult = { ok: true; items: NodeItem[] } | { ok: false; reason: string }

/** Looks once. Never throws. */
export type ReadList = (signal: AbortSignal) => Promise<ReadResult>

export interface SourceInit {
  /** After every look that succeeded. */
  onList: (items: readonly NodeItem[]) => void
  /** After every look that failed. */
  onFailure: (reason: string) => void
}

/** Where neighbours are learnt from: says the whole list whenever it looks. */
export interface Source {
  readonly kind: string
  start(): void
  /** Nothing is said any more once this has been called. */
  stop(): Promise<void>
}
