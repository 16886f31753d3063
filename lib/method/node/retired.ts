/** Replaced incarnations remembered per peer; a process that died longer ago has no frames on the way. */
const RETIRED_KEPT = 16

/** Incarnations of peers that have been replaced by later ones and may not come back. */
export class Retired {
  private readonly gone = new Map<string, Set<string>>()

  add(peer: string, incarnation: string): void {
    const gone = this.gone.get(peer) ?? new Set()
    gone.add(incarnation)
    if (gone.size > RETIRED_KEPT) gone.delete(gone.values().next().value!)
    this.gone.set(peer, gone)
  }

  has(peer: string, incarnation: string): boolean {
    return this.gone.get(peer)?.has(incarnation) ?? false
  }
}
