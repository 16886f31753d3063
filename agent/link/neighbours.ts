/** Where and who a neighbour is; one of both at least. Without an address it is expected to dial. */
export interface NeighbourSpec {
  address?: string
  agentId?: string
}

export interface Neighbour {
  address: string | null
  /** As given, else as the last handshake at the address said. */
  agentId: string | null
  /** The id was given: whoever else answers at the address is refused. */
  idIsGiven: boolean
  /** The node's own view of the link, 0..1. */
  quality: number
}

/** How many removed agents are remembered, so that they are not taken back when they dial. */
const MAX_REMOVED = 10_000

/** Whom this agent has been told of, and whom it has been told to forget. */
export class Neighbours {
  private readonly known = new Set<Neighbour>()
  private readonly removed = new Set<string>()

  get all(): Iterable<Neighbour> {
    return this.known
  }

  /** @throws TypeError without address and id */
  add({ address, agentId }: NeighbourSpec): Neighbour {
    if (address === undefined && agentId === undefined)
      throw new TypeError('a neighbour has an address or an id')
    if (agentId !== undefined) this.removed.delete(agentId)
    const present =
      (address !== undefined && this.find(address)) || (agentId !== undefined && this.find(agentId)) || null
    if (!present) {
      const neighbour: Neighbour = {
        address: address ?? null,
        agentId: agentId ?? null,
        idIsGiven: agentId !== undefined,
        quality: 1,
      }
      this.known.add(neighbour)
      return neighbour
    }
    if (address !== undefined) present.address = address
    if (agentId !== undefined) {
      present.agentId = agentId
      present.idIsGiven = true
    }
    return present
  }

  /** By address or agent id. */
  find(key: string): Neighbour | null {
    for (const neighbour of this.known) {
      if (neighbour.address === key || neighbour.agentId === key) return neighbour
    }
    return null
  }

  /** @returns the neighbour that was removed, or null where there was none */
  remove(key: string): Neighbour | null {
    const neighbour = this.find(key)
    if (neighbour) this.known.delete(neighbour)
    return neighbour
  }

  /** Refuses an agent until it is added again. */
  ban(agentId: string): void {
    this.removed.add(agentId)
    if (this.removed.size <= MAX_REMOVED) return
    for (const oldest of this.removed) {
      this.removed.delete(oldest)
      break
    }
  }

  unban(agentId: string): void {
    this.removed.delete(agentId)
  }

  isBanned(agentId: string): boolean {
    return this.removed.has(agentId)
  }
}
