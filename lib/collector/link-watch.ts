import type { Snapshot } from '@/lib/method/control'
import { isHeard } from '@/lib/method/control'
import type { EventDraft } from './judge'
import { eventOf, type Said, saidList } from './said'
import { countOf } from './words'

/** A link must be unnamed, or named, for so long before it is said to be lost, or found. */
export const LINK_STILL_INTERVALS = 3
/** What is there when the watch begins is no news. */
const LEARNING_INTERVALS = 10
const MOST_NAMED = 3
/** A link that delivers less than this share of what it did has weakened, */
export const WEAKENED_SHARE = 0.5
/** and is as it was from this share on. */
export const RECOVERED_SHARE = 0.8
/** More links come and go at once only where an overlay begins: how old each of them is does not matter then. */
const MOST_KEPT = 500

type Pair = [a: string, b: string]

interface Watched {
  a: string
  b: string
  named: boolean
  sinceMs: number
  /** What was last said of it. */
  known: boolean
  /** The most it has carried, of late. */
  full: number
  weakened: boolean
  /** Since when its weight contradicts what was last said. */
  weightSinceMs: number | null
}

interface Named {
  a: string
  b: string
  /** What both ends say at most. */
  weight: number
}

/** Follows which links agents name and what those deliver, where links are named. Knows only what it saw itself. */
export class LinkWatch {
  readonly #links = new Map<string, Watched>()
  #sinceMs: number | null = null

  /** Links come and go with what heard agents name; a link with a silent end is left as it was. */
  watch(snapshot: Snapshot, nameOf: (agentId: string) => string, intervalMs: number): EventDraft[] {
    this.#sinceMs ??= snapshot.atMs
    const heard = new Set<string>()
    const named = new Map<string, Named>()
    for (const agent of snapshot.agents) {
      if (!isHeard(agent, snapshot.atMs, intervalMs)) continue
      heard.add(agent.agentId)
      for (const { peer, weight } of agent.last.report.node.links) {
        const [a, b] = agent.agentId < peer ? [agent.agentId, peer] : [peer, agent.agentId]
        const other = named.get(`${a} ${b}`)?.weight ?? weight
        named.set(`${a} ${b}`, { a, b, weight: Math.min(weight, other) })
      }
    }
    for (const [key, { a, b, weight }] of named) {
      if (this.#links.has(key)) continue
      const link = { a, b, named: false, sinceMs: 0, known: false }
      this.#links.set(key, { ...link, full: weight, weakened: false, weightSinceMs: null })
    }
    const learning = snapshot.atMs - this.#sinceMs < LEARNING_INTERVALS * intervalMs
    const lost: Pair[] = []
    const found: Pair[] = []
    const weakened: Pair[] = []
    const recovered: Pair[] = []
    for (const [key, link] of this.#links) {
      if (!heard.has(link.a) || !heard.has(link.b)) continue
      const now = named.get(key)
      const isNamed = now !== undefined
      const stillMs = LINK_STILL_INTERVALS * intervalMs
      if (isNamed !== link.named) Object.assign(link, { named: isNamed, sinceMs: snapshot.atMs })
      const [first, second] = [nameOf(link.a), nameOf(link.b)]
      const pair: Pair = first < second ? [first, second] : [second, first]
      if (now && link.known && turnsWeight(link, now.weight, { atMs: snapshot.atMs, stillMs }))
        (link.weakened ? weakened : recovered).push(pair)
      if (link.named === link.known) continue
      if (!learning && snapshot.atMs - link.sinceMs < stillMs) continue
      Object.assign(link, { known: link.named, full: now?.weight ?? 0, weakened: false })
      if (!learning) (link.named ? found : lost).push(pair)
    }
    return [
      ...said('link-lost', lost, 'lost'),
      ...said('link-found', found, 'found'),
      ...said('link-weakened', weakened, `delivers less than ${100 * WEAKENED_SHARE} % of what it did`),
      ...said('link-recovered', recovered, 'delivers as before'),
    ]
  }
}

/** Whether it has weakened, or recovered, and stayed so. Takes note of the weight. */
function turnsWeight(
  link: Watched,
  weight: number,
  { atMs, stillMs }: { atMs: number; stillMs: number },
): boolean {
  if (!link.weakened) link.full = Math.max(link.full, weight)
  const turns = link.weakened ? weight >= RECOVERED_SHARE * link.full : weight < WEAKENED_SHARE * link.full
  if (!turns) {
    link.weightSinceMs = null
    return false
  }
  link.weightSinceMs ??= atMs
  if (atMs - link.weightSinceMs < stillMs) return false
  Object.assign(link, { weakened: !link.weakened, weightSinceMs: null })
  return true
}

function said(kind: EventDraft['kind'], links: readonly Pair[], what: string): EventDraft[] {
  if (links.length === 0) return []
  const each = links.map(([a, b]): Said => [{ node: a }, ' – ', { node: b }])
  const named: Said =
    links.length > MOST_NAMED
      ? [countOf(links.length, 'link')]
      : [`${links.length === 1 ? 'link' : 'links'} `, ...saidList(each)]
  return [{ ...eventOf(kind, [...named, ` ${what}`]), data: { links: links.slice(0, MOST_KEPT) } }]
}
