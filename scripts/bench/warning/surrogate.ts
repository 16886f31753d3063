import { edgesOf, fromEdges, type SparseGraph } from '@/lib/method/graph'
import type { Random } from '@/lib/method/random'
import { algebraicConnectivity } from '@/lib/method/spectrum'
import type { WarnFacts } from '@/lib/warn/facts'
import type { Liveable } from './healthy-life'
import type { NoiseModel } from './noise'

const key = (a: number, b: number): string => (a < b ? `${a}-${b}` : `${b}-${a}`)

interface Known {
  lambda2: number
  crossing: number | null
  smaller: number | null
}

/** Every run of a graph meets the same shapes. */
const KNOWN = new WeakMap<SparseGraph, Map<string, Known>>()

/** The bare graph under the same life: its exact λ₂ in place of walkers. All links carry the same weight. */
export class BareOverlay implements Liveable {
  readonly #links: { a: number; b: number }[]
  readonly #nodes: number
  readonly #gone = new Set<string>()
  readonly #down = new Set<number>()
  /** By what is there; λ₂ at weight 1. */
  readonly #known: Map<string, Known>
  #weight = 1
  /** Of the links and nodes that are there. */
  shape = ''

  constructor(graph: SparseGraph) {
    this.#nodes = graph.nodes
    this.#known = KNOWN.get(graph) ?? new Map()
    KNOWN.set(graph, this.#known)
    this.#links = edgesOf(graph).map(([a, b]) => ({ a, b }))
  }

  weaken(_a: number, _b: number, weight: number): void {
    this.#weight = weight
  }

  cut(a: number, b: number): void {
    this.#gone.add(key(a, b))
    this.#changed()
  }

  join(a: number, b: number): void {
    this.#gone.delete(key(a, b))
    this.#changed()
  }

  stop(node: number): void {
    this.#down.add(node)
    this.#changed()
  }

  start(node: number): void {
    this.#down.delete(node)
    this.#changed()
  }

  #changed(): void {
    this.shape = `${[...this.#gone].sort().join()}|${[...this.#down].sort().join()}`
  }

  /** As it is now. */
  exact(): {
    lambda2: number
    crossing: number | null
    smaller: number | null
    joined: number
    heard: number
  } {
    let known = this.#known.get(this.shape)
    if (!known) {
      known = this.#read()
      this.#known.set(this.shape, known)
    }
    const heard = this.#nodes - this.#down.size
    return { ...known, lambda2: known.lambda2 * this.#weight, joined: this.#nodes, heard }
  }

  #read(): Known {
    const live = this.#links.filter(
      ({ a, b }) => !this.#gone.has(key(a, b)) && !this.#down.has(a) && !this.#down.has(b),
    )
    const nodes = [...new Set(live.flatMap(({ a, b }) => [a, b]))]
    const index = new Map(nodes.map((node, at) => [node, at]))
    const graph = fromEdges(
      nodes.length,
      live.map(({ a, b }) => [index.get(a)!, index.get(b)!] as const),
    )
    const { lambda2, fiedler } = algebraicConnectivity(graph)
    const above = nodes.filter((_, at) => fiedler[at]! >= 0).length
    const crossing = live.filter(
      ({ a, b }) => fiedler[index.get(a)!]! >= 0 !== fiedler[index.get(b)!]! >= 0,
    ).length
    return { lambda2: Math.max(0, lambda2), crossing, smaller: Math.min(above, nodes.length - above) }
  }
}

/** What walkers would read of it: late, with noise that hangs together, and not fresh for a while after each change. */
export class SurrogateReading {
  readonly #random: Random
  readonly #noise: NoiseModel
  readonly #late: number[] = []
  #deviation = 0
  #settlesIn = 0
  #shape: string | null = null

  constructor({ random }: { random: Random }, noise: NoiseModel) {
    this.#random = random
    this.#noise = noise
  }

  /** One sample on. */
  next(overlay: BareOverlay, { atMs, usual }: { atMs: number; usual: number | null }): WarnFacts {
    const now = overlay.exact()
    const { lagSamples, phi, spread, settlingSamples, freshAtRest } = this.#noise
    this.#late.push(now.lambda2)
    if (this.#late.length > lagSamples + 1) this.#late.shift()
    this.#deviation = phi * this.#deviation + spread * Math.sqrt(1 - phi * phi) * this.#normal()
    if (this.#shape !== null && this.#shape !== overlay.shape) this.#settlesIn = settlingSamples
    this.#shape = overlay.shape
    const isFresh = this.#settlesIn <= 0 && this.#random.uniform() < freshAtRest
    this.#settlesIn -= 1
    const isSplit = now.lambda2 < 1e-6
    return {
      atMs,
      isFresh,
      lambda2: this.#late[0]! * Math.exp(this.#deviation),
      usual,
      level: isSplit ? 'split' : 'firm',
      treatAsSplit: false,
      crossingLinks: now.crossing,
      smallerSide: now.smaller,
      joined: now.joined,
      heard: now.heard,
      linksKnown: null,
      linksMeasured: null,
      check: null,
      leftOut: 0,
    }
  }

  #normal(): number {
    return (
      Math.sqrt(-2 * Math.log(1 - this.#random.uniform())) * Math.cos(2 * Math.PI * this.#random.uniform())
    )
  }
}
