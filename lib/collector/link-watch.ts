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
/** More links come and go at once only where an overlay begins: how old each of them is does not matter then. */
const MOST_KEPT = 500

interface Watched {
  a: string
  b: string
  named: boolean
  sinceMs: number
  /** What was last said of it. */
  known: boolean
}

/** Follows which links agents name, where links are named. Knows only what it saw itself. */
export class LinkWatch {
  readonly #links = new Map<string, Watched>()
  #sinceMs: number | null = null

  /** Links come and go with what heard agents name; a link with a silent end is left as it was. */
  watch(snapshot: Snapshot, nameOf: (agentId: string) => string, intervalMs: number): EventDraft[] {
    this.#sinceMs ??= snapshot.atMs
    const heard = new Set<string>()
    const named = new Map<string, [string, string]>()
    for (const agent of snapshot.agents) {
      if (!isHeard(agent, snapshot.atMs, intervalMs)) continue
      heard.add(agent.agentId)
      for (const { peer } of agent.last.report.node.links) {
        const [a, b] = agent.agentId < peer ? [agent.agentId, peer] : [peer, agent.agentId]
        named.set(`${a} ${b}`, [a, b])
      }
    }
    for (const [key, [a, b]] of named) {
      if (!this.#links.has(key)) this.#links.set(key, { a, b, named: false, sinceMs: 0, known: false })
    }
    const learning = snapshot.atMs - this.#sinceMs < LEARNING_INTERVALS * intervalMs
    const lost: Pair[] = []
    const found: Pair[] = []
    for (const [key, link] of this.#links) {
      if (!heard.has(link.a) || !heard.has(link.b)) continue
      const now = named.has(key)
      if (now !== link.named) Object.assign(link, { named: now, sinceMs: snapshot.atMs })
      if (link.named === link.known) continue
      if (!learning && snapshot.atMs - link.sinceMs < LINK_STILL_INTERVALS * intervalMs) continue
      link.known = link.named
      const [a, b] = [nameOf(link.a), nameOf(link.b)]
      if (!learning) (link.named ? found : lost).push(a < b ? [a, b] : [b, a])
    }
    return [...said('link-lost', lost, 'lost'), ...said('link-found', found, 'found')]
  }
}

type Pair = [a: string, b: string]

function said(kind: 'link-lost' | 'link-found', links: readonly Pair[], what: string): EventDraft[] {
  if (links.length === 0) return []
  const each = links.map(([a, b]): Said => [{ node: a }, ' – ', { node: b }])
  const named: Said =
    links.length > MOST_NAMED
      ? [countOf(links.length, 'link')]
      : [`${links.length === 1 ? 'link' : 'links'} `, ...saidList(each)]
  return [{ ...eventOf(kind, [...named, ` ${what}`]), data: { links: links.slice(0, MOST_KEPT) } }]
}
