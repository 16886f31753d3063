import { edgesOf } from '@/lib/method/graph'
import { randomRegular } from '@/lib/method/graphs'
import { createRandom, type Random } from '@/lib/method/random'
import type { Labels } from '@/lib/topology'

export const OFFICES = ['Tarnwick', 'Gullhythe', 'Pinnet Bay', 'Eelholm'] as const
export type Office = (typeof OFFICES)[number]
export const NODES_PER_OFFICE = 9
/** The offices that end up on one side of the weak cut. */
export const FAR_SIDE: readonly Office[] = ['Pinnet Bay', 'Eelholm']

/**
 * Of 1,500 seeds one of those whose weakest cuts are the most alike while all links are up (λ₃/λ₂ = 1.02), and whose
 * three last links across end at six nodes of three pairs of offices.
 */
const SEED = 'harbourline 491'
const DEGREE_IN_OFFICE = 4
const MORE_LINKS_IN_OFFICE = 2
const LINKS_WITHIN_A_SIDE = 6
const LINKS_ACROSS_PER_PAIR = 5

/** The links across that the story leaves, and what they deliver when all others are gone. */
export const LAST_LINKS = [
  { a: 'eel-06', b: 'tar-04', weight: 1 },
  { a: 'gul-04', b: 'pin-05', weight: 0.82 },
  { a: 'pin-06', b: 'tar-06', weight: 0.64 },
] as const

export interface HarbourlineNode {
  name: string
  office: Office
  labels: Labels
}

export interface HarbourlineLink {
  /** a before b. */
  a: string
  b: string
  /** Joins the two sides. */
  across: boolean
}

export interface Harbourline {
  nodes: HarbourlineNode[]
  links: HarbourlineLink[]
}

/** The invented co-operative of four harbour offices: 36 nodes, 112 links, always the same. */
export function harbourline(): Harbourline {
  const nodes = OFFICES.flatMap((office) =>
    Array.from({ length: NODES_PER_OFFICE }, (_, index) => nodeOf(office, index)),
  )
  const links = pairs(createRandom(SEED)).map(([i, j]): HarbourlineLink => {
    const [one, other] = [nodes[i]!, nodes[j]!]
    const [a, b] = [one.name, other.name].sort()
    return { a: a!, b: b!, across: isFar(one) !== isFar(other) }
  })
  return { nodes, links: links.sort((x, y) => compare(x.a, y.a) || compare(x.b, y.b)) }
}

export const isFar = ({ office }: HarbourlineNode): boolean => FAR_SIDE.includes(office)

const compare = (a: string, b: string): number => (a < b ? -1 : a > b ? 1 : 0)

function nodeOf(office: Office, index: number): HarbourlineNode {
  const role = index < 4 ? 'berths' : index < 7 ? 'tides' : 'gateway'
  return {
    name: `${office.slice(0, 3).toLowerCase()}-0${index + 1}`,
    office,
    labels: { harbour: office, role, power: index % 2 === 0 ? 'a' : 'b' },
  }
}

function pairs(random: Random): [number, number][] {
  const links = new Map<string, [number, number]>()
  const add = (i: number, j: number): boolean => {
    const key = i < j ? `${i}-${j}` : `${j}-${i}`
    if (i === j || links.has(key)) return false
    links.set(key, [i, j])
    return true
  }
  for (let office = 0; office < OFFICES.length; office++) {
    const first = office * NODES_PER_OFFICE
    for (const [i, j] of edgesOf(randomRegular(NODES_PER_OFFICE, DEGREE_IN_OFFICE, random)))
      add(first + i, first + j)
    for (let more = 0; more < MORE_LINKS_IN_OFFICE; ) {
      const [i, j] = shuffled(NODES_PER_OFFICE, random)
      if (add(first + i!, first + j!)) more++
    }
  }
  // Every node of an office takes its turn before one takes a second link to another office.
  const turns: number[][] = OFFICES.map(() => [])
  const next = (office: number): number => {
    if (turns[office]!.length === 0) turns[office] = shuffled(NODES_PER_OFFICE, random)
    return office * NODES_PER_OFFICE + turns[office]!.pop()!
  }
  const between = (one: number, other: number, count: number): void => {
    for (let made = 0; made < count; ) if (add(next(one), next(other))) made++
  }
  between(0, 1, LINKS_WITHIN_A_SIDE)
  between(2, 3, LINKS_WITHIN_A_SIDE)
  for (let round = 0; round < LINKS_ACROSS_PER_PAIR; round++)
    for (const [one, other] of [
      [0, 2],
      [0, 3],
      [1, 2],
      [1, 3],
    ] as const)
      between(one, other, 1)
  return [...links.values()]
}

function shuffled(count: number, random: Random): number[] {
  const list = Array.from({ length: count }, (_, i) => i)
  for (let i = count - 1; i > 0; i--) {
    const j = Math.floor(random.uniform() * (i + 1))
    const swap = list[i]!
    list[i] = list[j]!
    list[j] = swap
  }
  return list
}

/** As `npm run fleet` reads it. */
export function edgesCsv({ links }: Harbourline): string {
  return `source,target,weight\n${links.map(({ a, b }) => `${a},${b},1\n`).join('')}`
}

/** As `npm run fleet` reads it. */
export function nodesCsv({ nodes }: Harbourline): string {
  const rows = nodes.map(({ name, labels }) => `${name},${labels.harbour},${labels.role},${labels.power}\n`)
  return `name,harbour,role,power\n${rows.join('')}`
}
