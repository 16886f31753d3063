import { components, fromEdges } from '@/lib/method/graph'
import { createRandom, type Random } from '@/lib/method/random'
import type { Simulation } from '@/lib/method/simulate'

export const CHURN_KINDS = ['lose', 'add', 'weaken', 'restart', 'leave', 'join', 'stall', 'silence'] as const
export type ChurnKind = (typeof CHURN_KINDS)[number]

/** Things that happen to overlays, one at a time; none of them parts what is left. */
export class Churn {
  private readonly simulation: Simulation
  private readonly random: Random
  /** Links that were taken away and may come back, and nodes that left, with their links. */
  private readonly lost: { a: number; b: number }[] = []
  private readonly left: { node: number; links: { a: number; b: number; weight: number }[] }[] = []

  constructor(simulation: Simulation, seed: string) {
    this.simulation = simulation
    this.random = createRandom(`churn ${seed}`)
  }

  /** Lets something happen, and up to 20 s pass where it takes its time. @returns what it was */
  happen(): ChurnKind {
    for (;;) {
      const kind = CHURN_KINDS[this.below(CHURN_KINDS.length)]!
      if (this[kind]()) return kind
    }
  }

  private lose(): boolean {
    const links = this.simulation.liveLinks()
    const link = links[this.below(links.length)]!
    if (!this.holds(links.filter((other) => other !== link))) return false
    this.simulation.cut(link.a, link.b)
    this.lost.push(link)
    return true
  }

  /** A link that was lost comes back, or a new one begins. */
  private add(): boolean {
    const back = this.lost.pop()
    const nodes = this.present()
    const a = back?.a ?? nodes[this.below(nodes.length)]!
    const b = back?.b ?? nodes[this.below(nodes.length)]!
    const isNew = this.simulation
      .liveLinks()
      .every((link) => !((link.a === a && link.b === b) || (link.a === b && link.b === a)))
    if (a === b || !isNew || !nodes.includes(a) || !nodes.includes(b)) return false
    this.simulation.join(a, b)
    return true
  }

  private weaken(): boolean {
    const links = this.simulation.liveLinks()
    const { a, b } = links[this.below(links.length)]!
    this.simulation.weaken(a, b, [0.5, 0.8, 1][this.below(3)]!)
    return true
  }

  private restart(): boolean {
    const nodes = this.present()
    const node = nodes[this.below(nodes.length)]!
    this.simulation.stop(node)
    this.simulation.run(4_000)
    this.simulation.start(node)
    return true
  }

  private leave(): boolean {
    const nodes = this.present()
    const node = nodes[this.below(nodes.length)]!
    const links = this.simulation.liveLinks()
    const own = links.filter(({ a, b }) => a === node || b === node)
    const rest = links.filter((link) => !own.includes(link))
    if (this.left.length > nodes.length / 5 || !this.holds(rest, nodes.length - 1)) return false
    this.simulation.leave(node)
    this.left.push({ node, links: own })
    return true
  }

  private join(): boolean {
    const back = this.left.shift()
    if (!back) return false
    const nodes = this.present()
    const links = back.links.filter(({ a, b }) => nodes.includes(a === back.node ? b : a))
    if (links.length === 0) {
      this.left.push(back)
      return false
    }
    this.simulation.start(back.node)
    for (const { a, b, weight } of links) this.simulation.join(a, b, weight)
    return true
  }

  private stall(): boolean {
    const nodes = this.present()
    this.simulation.agents[nodes[this.below(nodes.length)]!]!.stalledUntilMs = this.simulation.nowMs + 6_000
    return true
  }

  private silence(): boolean {
    const nodes = this.present()
    const agent = this.simulation.agents[nodes[this.below(nodes.length)]!]!
    agent.silent = true
    this.simulation.run(8_000)
    agent.silent = false
    return true
  }

  private present(): number[] {
    const away = new Set(this.left.map(({ node }) => node))
    return this.simulation.agents.flatMap((_, node) => (away.has(node) ? [] : [node]))
  }

  /** Whether these links keep all nodes present together. */
  private holds(links: readonly { a: number; b: number }[], nodes = this.present().length): boolean {
    const ends = [...new Set(links.flatMap(({ a, b }) => [a, b]))]
    if (ends.length < nodes) return false
    const index = new Map(ends.map((node, position) => [node, position]))
    const graph = fromEdges(
      ends.length,
      links.map(({ a, b }) => [index.get(a)!, index.get(b)!] as const),
    )
    return components(graph).count === 1
  }

  private below(limit: number): number {
    return Math.floor(this.random.uniform() * limit)
  }
}
