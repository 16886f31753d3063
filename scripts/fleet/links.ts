import type { TopologyGraph } from '@/lib/topology'

/** A link between two nodes by name; a before b. */
export interface FleetLink {
  a: string
  b: string
  weight: number
}

/** The links as they are meant to be now. */
export class FleetLinks {
  private readonly links = new Map<string, FleetLink>()

  static from(graph: TopologyGraph): FleetLinks {
    const links = new FleetLinks()
    graph.forEachEdge((_, { weight }, source, target) => links.add(source, target, weight))
    return links
  }

  get all(): Iterable<FleetLink> {
    return this.links.values()
  }

  get count(): number {
    return this.links.size
  }

  find(one: string, other: string): FleetLink | null {
    return this.links.get(key(one, other)) ?? null
  }

  of(name: string): FleetLink[] {
    return [...this.links.values()].filter(({ a, b }) => a === name || b === name)
  }

  add(one: string, other: string, weight: number): FleetLink {
    const [a, b] = sorted(one, other)
    const link = { a, b, weight }
    this.links.set(key(one, other), link)
    return link
  }

  remove(one: string, other: string): void {
    this.links.delete(key(one, other))
  }
}

function sorted(one: string, other: string): [string, string] {
  return one < other ? [one, other] : [other, one]
}

const key = (one: string, other: string): string => JSON.stringify(sorted(one, other))
