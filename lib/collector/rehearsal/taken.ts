import type { Excluded } from '@/lib/data/rehearsal-dto'
import type { Disclosure } from '@/lib/method/orders'
import { countOf, listOf } from '../words'

/** Orders name each of them once per colony, a link by both ends: more would make orders too long for a link's frame. */
export const MOST_TAKEN_NAMES = 1_000
export const LEAST_REMAIN = 2
/** Where links are not named: of two nodes alone the answer would be whether they are linked. */
export const LEAST_SHARE_UNNAMED = 1 / 2

export interface TakableAgent {
  agentId: string
  name: string
  labels: Readonly<Record<string, string>>
  /** False for those of a team other than the one that asks: they remain, whatever they are called. */
  isOwn?: boolean
}

export interface TakableLink {
  a: string
  b: string
}

/** What a rehearsal takes away, by agent ids. */
export interface Taken {
  /** Sorted. */
  agents: string[]
  /** Both ends remain. */
  links: [string, string][]
  remain: number
}

export interface TakenFrom {
  disclosure: Disclosure
  /** Those that have joined. */
  agents: readonly TakableAgent[]
  /** By the names of their ends; empty unless links are named. */
  links: readonly TakableLink[]
}

export interface TakenProblem {
  path: 'exclude' | 'exclude.nodes' | 'exclude.links' | 'exclude.labels' | 'exclude.between'
  message: string
}

/**
 * Resolves names and labels to agents.
 * @param isAsked false once it begins: who has left since then is away already, and is no problem
 */
export function takenOf(
  exclude: Excluded,
  from: TakenFrom,
  isAsked: boolean,
): { taken: Taken } | { problems: TakenProblem[] } {
  const { nodes, links, labels, between } = exclude
  const problems: TakenProblem[] = []
  const own = from.agents.filter(({ isOwn = true }) => isOwn)
  const byName = new Map(own.map((agent) => [agent.name, agent]))
  const say = (path: TakenProblem['path'], message: string) => problems.push({ path, message })
  if (nodes.length + links.length + labels.length + between.length === 0)
    return { problems: [{ path: 'exclude', message: 'Say which nodes, labels or links are to be away.' }] }
  const unknown = [...new Set(nodes.filter((name) => !byName.has(name)))]
  if (isAsked && unknown.length > 0)
    say(
      'exclude.nodes',
      own.length < from.agents.length
        ? `None of your nodes is called ${listOf(unknown)}. Choose nodes of your team that have joined.`
        : `No node of this overlay is called ${listOf(unknown)}. Choose nodes that have joined.`,
    )
  const empty = labels.filter(({ key, value }) => !own.some((agent) => agent.labels[key] === value))
  if (isAsked && empty.length > 0)
    say('exclude.labels', `No node has ${listOf(empty.map(({ key, value }) => `${key} ${value}`))}.`)
  const gone = new Set([
    ...nodes.flatMap((name) => byName.get(name)?.agentId ?? []),
    ...own
      .filter((agent) => labels.some(({ key, value }) => agent.labels[key] === value))
      .map(({ agentId }) => agentId),
  ])
  const isNamed = from.disclosure === 'named'
  const isLinks = links.length + between.length > 0
  if (isLinks && !isNamed)
    say(
      links.length > 0 ? 'exclude.links' : 'exclude.between',
      `This overlay is ${from.disclosure}: without a link its walkers would tell whether it is there. Take nodes or labels away, or rehearse links in a named overlay.`,
    )
  const pairs = isLinks && isNamed ? pairsOf(exclude, from, isAsked, say) : []
  const remaining = pairs.filter(([a, b]) => !gone.has(a) && !gone.has(b))
  const remain = from.agents.length - gone.size
  if (gone.size + 2 * remaining.length > MOST_TAKEN_NAMES)
    say(
      'exclude',
      `That is ${countOf(gone.size, 'node')} and ${countOf(remaining.length, 'link')}; at most ${MOST_TAKEN_NAMES} nodes can be rehearsed at once, a link counting as two.`,
    )
  if (remain < LEAST_REMAIN)
    say('exclude', `${remain === 0 ? 'No node' : 'One node'} would remain. Leave at least ${LEAST_REMAIN}.`)
  else if (!isNamed && remain < LEAST_SHARE_UNNAMED * from.agents.length)
    say(
      'exclude',
      `${remain} of ${countOf(from.agents.length, 'node')} would remain. This overlay is ${from.disclosure}: what holds a few nodes together would tell their links, so at least half must remain.`,
    )
  if (problems.length > 0) return { problems }
  if (gone.size === 0 && remaining.length === 0)
    return {
      problems: [
        { path: 'exclude', message: 'Nothing of what was to be away is there now. Rehearse something else.' },
      ],
    }
  return { taken: { agents: [...gone].sort(), links: remaining, remain } }
}

type Say = (path: TakenProblem['path'], message: string) => void

function pairsOf(
  { links, between }: Excluded,
  { agents, links: named }: TakenFrom,
  isAsked: boolean,
  say: Say,
): [string, string][] {
  const byName = new Map(agents.flatMap((agent) => (agent.isOwn === false ? [] : [[agent.name, agent]])))
  const known = new Set(named.map(({ a, b }) => keyOf(a, b)))
  const isThere = ([a, b]: [string, string]) => known.has(keyOf(a, b)) && byName.has(a) && byName.has(b)
  const missing = links.filter((pair) => !isThere(pair))
  if (isAsked && missing.length > 0)
    say(
      'exclude.links',
      `There is no link ${listOf(missing.map(([a, b]) => `${a} – ${b}`))} now. Choose links that are measured.`,
    )
  const wanted = named.filter(({ a, b }) => {
    const [one, other] = [byName.get(a)?.labels ?? {}, byName.get(b)?.labels ?? {}]
    return between.some(
      (pair) =>
        (one[pair.key] === pair.a && other[pair.key] === pair.b) ||
        (one[pair.key] === pair.b && other[pair.key] === pair.a),
    )
  })
  if (isAsked && between.length > 0 && wanted.length === 0)
    say('exclude.between', 'No link joins nodes with these labels now.')
  const all = [...links.filter(isThere), ...wanted.map(({ a, b }): [string, string] => [a, b])]
  const unique = new Map(all.map((pair) => [keyOf(...pair), pair]))
  return [...unique.values()].flatMap(([a, b]) => {
    const ids = [byName.get(a)?.agentId, byName.get(b)?.agentId]
    const [one, other] = ids
    return one && other ? [[one, other] as [string, string]] : []
  })
}

const keyOf = (a: string, b: string): string => (a < b ? `${a}\n${b}` : `${b}\n${a}`)
