import type { Excluded } from '@/lib/data/rehearsal-dto'

type Label = Excluded['labels'][number]
type Between = Excluded['between'][number]
type Link = Excluded['links'][number]

/** Takes one in, or out again. */
export function toggleNode(exclude: Excluded, name: string): Excluded {
  return { ...exclude, nodes: toggled(exclude.nodes, name, (one) => one === name) }
}

export function toggleLabel(exclude: Excluded, label: Label): Excluded {
  return { ...exclude, labels: toggled(exclude.labels, label, (one) => labelId(one) === labelId(label)) }
}

export function toggleLink(exclude: Excluded, link: Link): Excluded {
  return { ...exclude, links: toggled(exclude.links, link, (one) => linkId(one) === linkId(link)) }
}

/** Takes it in, where it is not in yet. */
export function withBetween(exclude: Excluded, between: Between): Excluded {
  const isIn = exclude.between.some((one) => betweenId(one) === betweenId(between))
  return isIn ? exclude : { ...exclude, between: [...exclude.between, between] }
}

export function toggleBetween(exclude: Excluded, between: Between): Excluded {
  const same = (one: Between) => betweenId(one) === betweenId(between)
  return { ...exclude, between: toggled(exclude.between, between, same) }
}

/** Takes all in that are not in yet. */
export function withNodes(exclude: Excluded, names: readonly string[]): Excluded {
  return { ...exclude, nodes: [...new Set([...exclude.nodes, ...names])] }
}

export function withLabels(exclude: Excluded, labels: readonly Label[]): Excluded {
  const all = [...exclude.labels, ...labels]
  return { ...exclude, labels: [...new Map(all.map((label) => [labelId(label), label])).values()] }
}

export const labelId = ({ key, value }: Label): string => `${key}=${value}`
/** Links have no direction. */
export const linkId = ([a, b]: readonly [string, string]): string => (a < b ? `${a}\n${b}` : `${b}\n${a}`)
export const betweenId = ({ key, a, b }: Between): string => `${key}\n${linkId([a, b])}`

function toggled<T>(all: readonly T[], one: T, same: (other: T) => boolean): T[] {
  return all.some(same) ? all.filter((other) => !same(other)) : [...all, one]
}
