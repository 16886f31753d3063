/** An overlay of two harbour offices: dense within each, few links across. */
export interface TwoSides {
  /** Node names by office. */
  offices: Record<'Tarnwick' | 'Eelholm', string[]>
  links: [string, string][]
  /** Those of `links` that join the offices. */
  across: [string, string][]
  edgesCsv: string
  nodesCsv: string
}

/**
 * Each office is a circulant graph, node i linked to i + offset for each of `offsets`; `across` says at which numbers
 * the two are linked to each other.
 */
export function twoSides(
  perOffice: number,
  offsets: readonly number[],
  acrossAt: readonly number[],
): TwoSides {
  const named = (prefix: string) =>
    Array.from({ length: perOffice }, (_, index) => `${prefix}-${String(index + 1).padStart(2, '0')}`)
  const offices = { Tarnwick: named('tar'), Eelholm: named('eel') }
  const within = Object.values(offices).flatMap((names) =>
    names.flatMap((name, index) =>
      offsets.map((offset): [string, string] => [name, at(names, (index + offset) % perOffice)]),
    ),
  )
  const across = acrossAt.map((index): [string, string] => [
    at(offices.Eelholm, index),
    at(offices.Tarnwick, index),
  ])
  const links = [...within, ...across]
  const rows = Object.entries(offices).flatMap(([office, names]) =>
    names.map((name) => `${name},${office}\n`),
  )
  return {
    offices,
    links,
    across,
    edgesCsv: links.map(([a, b]) => `${a},${b}\n`).join(''),
    nodesCsv: `name,harbour\n${rows.join('')}`,
  }
}

function at(names: readonly string[], index: number): string {
  const name = names[index]
  if (name === undefined) throw new Error(`There is no node number ${index}.`)
  return name
}
