import type { Random } from '../random'
import { adjustedInformation } from './mutual-information'
import { permutationP, permutationsFor } from './permutation'

export interface SidedNode {
  side: 'a' | 'b'
  labels: Readonly<Record<string, string>>
}

export interface ExplainingLabel {
  key: string
  values: number
  /** Nodes on a side that have the label, and those that have not and are left out of it. */
  labelled: number
  unlabelled: number
  /** Adjusted mutual information of side and label, normaliser min: 1 where each value lies wholly on one side. */
  adjusted: number
  /** Of this key by itself: of many keys one in twenty lies under 0.05 by chance. */
  p: number
  permutations: number
  /** Where each value lies wholly on one side: which on which. */
  exactly: { a: string[]; b: string[] } | null
}

export const LEFT_OUT_REASONS = ['one-value', 'nearly-unique', 'one-side'] as const
export interface LabelLeftOut {
  key: string
  values: number
  labelled: number
  because: (typeof LEFT_OUT_REASONS)[number]
}

export interface Explanation {
  /** The most telling first. */
  labels: ExplainingLabel[]
  leftOut: LabelLeftOut[]
}

/** A key with more values than this per node that has it names nodes rather than groups them. */
const MOST_VALUES_PER_NODE = 0.5

/** How far each label key tells on which side a node is. Keys that could tell of any cut, or of none, are left out and listed. */
export function explainSides(nodes: readonly SidedNode[], { random }: { random: Random }): Explanation {
  const keys = [...new Set(nodes.flatMap(({ labels }) => Object.keys(labels)))].sort()
  const explanation: Explanation = { labels: [], leftOut: [] }
  for (const key of keys) {
    const having = nodes.flatMap(({ side, labels }) => {
      const value = labels[key]
      return value === undefined ? [] : [{ side, value }]
    })
    const values = [...new Set(having.map(({ value }) => value))].sort()
    const because = whyLeftOut(values.length, having)
    if (because) explanation.leftOut.push({ key, values: values.length, labelled: having.length, because })
    else explanation.labels.push(explained(key, values, having, nodes.length, random))
  }
  explanation.labels.sort(
    (one, other) =>
      Number((other.adjusted - one.adjusted).toFixed(9)) || one.values - other.values || one.p - other.p,
  )
  return explanation
}

type Having = readonly { side: SidedNode['side']; value: string }[]

function whyLeftOut(values: number, having: Having): LabelLeftOut['because'] | null {
  if (values > MOST_VALUES_PER_NODE * having.length) return 'nearly-unique'
  if (values < 2) return 'one-value'
  return new Set(having.map(({ side }) => side)).size < 2 ? 'one-side' : null
}

function explained(
  key: string,
  values: readonly string[],
  having: Having,
  nodes: number,
  random: Random,
): ExplainingLabel {
  const places = new Map(values.map((value, place) => [value, place]))
  const counts = { a: values.map(() => 0), b: values.map(() => 0) }
  for (const { side, value } of having) counts[side][places.get(value)!]! += 1
  const permutations = permutationsFor(having.length)
  const isExact = values.every((_, place) => counts.a[place] === 0 || counts.b[place] === 0)
  const on = (side: SidedNode['side']) => values.filter((_, place) => counts[side][place]! > 0)
  return {
    key,
    values: values.length,
    labelled: having.length,
    unlabelled: nodes - having.length,
    adjusted: adjustedInformation([counts.a, counts.b]),
    p: permutationP(
      having.map(({ value }) => places.get(value)!),
      having.map(({ side }) => side === 'b'),
      { random, permutations },
    ),
    permutations,
    exactly: isExact ? { a: on('a'), b: on('b') } : null,
  }
}
