import { type TakenFrom, takenOf } from '@/lib/collector/rehearsal/taken'
import { takenWords } from '@/lib/collector/rehearsal/words'
import { listOf } from '@/lib/collector/words'
import type { Overlay, OverlayLink, OverlayNode } from '@/lib/data/dto'
import type { Excluded } from '@/lib/data/rehearsal-dto'
import { formatCount, formatLink } from '../format'

export const NOTHING: Excluded = { nodes: [], links: [], labels: [], between: [] }
/** So many names are said in the sentence; the rest are counted. */
const NAMED_MOST = 6

/** What can be chosen from, as the page knows it. */
export interface ChooseFrom {
  disclosure: Overlay['disclosure']
  nodes: readonly OverlayNode[]
  links: readonly OverlayLink[]
}

export interface Chosen {
  /** Names of nodes that would be away, sorted. */
  nodes: string[]
  /** Links that would be away while both their ends remain. */
  links: [string, string][]
  /** Of nodes that have joined. */
  joined: number
  /** What stands against it, a sentence each; empty where it can begin. */
  problems: string[]
}

const STATES_OF_JOINED: readonly OverlayNode['state'][] = ['heard', 'unheard', 'detached']

/** Only who has joined can be away: the others are already. */
export function joinedOf(nodes: readonly OverlayNode[]): OverlayNode[] {
  return nodes.filter(({ state }) => STATES_OF_JOINED.includes(state))
}

/** Each team takes away its own. */
export function takableOf(nodes: readonly OverlayNode[]): OverlayNode[] {
  return joinedOf(nodes).filter(({ partner }) => !partner)
}

export function isNothing({ nodes, links, labels, between }: Excluded): boolean {
  return nodes.length + links.length + labels.length + between.length === 0
}

/** Settled by the same rules as the server's, with names for ids; the server has the last word. */
export function chosenOf(exclude: Excluded, { disclosure, nodes, links }: ChooseFrom): Chosen {
  const joined = joinedOf(nodes)
  const from: TakenFrom = {
    disclosure,
    agents: joined.map(({ name, labels, partner }) => ({ agentId: name, name, labels, isOwn: !partner })),
    links: disclosure === 'named' ? links.filter(({ state }) => state === 'live') : [],
  }
  const away = takableOf(nodes).filter(
    ({ name, labels }) =>
      exclude.nodes.includes(name) || exclude.labels.some(({ key, value }) => labels[key] === value),
  )
  const settled = takenOf(exclude, from, true)
  return {
    nodes: away.map(({ name }) => name).sort(),
    links: 'taken' in settled ? settled.taken.links : [],
    joined: joined.length,
    problems: 'problems' in settled ? settled.problems.map(({ message }) => message) : [],
  }
}

/** What would be done, before it is: "Rehearse draining 4 of 36 nodes: tar-03, …". */
export function choiceSentence(exclude: Excluded, { nodes, links, joined }: Chosen): string {
  if (isNothing(exclude)) return 'Nothing is chosen yet.'
  const drained = nodes.length > 0 ? `draining ${nodes.length} of ${formatCount(joined, 'node')}` : null
  const cut = links.length > 0 ? `cutting ${formatCount(links.length, 'link')}` : null
  const does = [drained, cut].filter((part) => part !== null)
  if (does.length === 0) return `Rehearse without ${takenWords(exclude)}.`
  const names = [...nodes, ...links.map(([a, b]) => formatLink(a, b))]
  return `Rehearse ${does.join(' and ')}: ${listOf(names, NAMED_MOST)}.`
}

/** The same with every name, for whoever has to know exactly; names apart, as they may hold commas. */
export function excludedInFull(exclude: Excluded): { said: string; names: string[] } {
  const { nodes, links } = exclude
  const rest = { ...exclude, nodes: nodes.length > 4 ? [] : nodes, links: links.length > 2 ? [] : links }
  return {
    said: isNothing(rest) ? '' : takenWords(rest),
    names: [
      ...(nodes.length > 4 ? nodes : []),
      ...(links.length > 2 ? links.map(([a, b]) => formatLink(a, b)) : []),
    ],
  }
}

/** Of what was asked for, for a person: "tar-01, tar-02 and all nodes with office Eelholm". */
export const excludedWords = takenWords
