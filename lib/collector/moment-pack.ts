import { z } from 'zod'
import type { Moment, MomentNode } from './moment'

/** A moment as the columns of one row. Nodes are numbers, in order; every array and text has one place for each. */
export interface PackedMoment {
  /** int4multirange */
  nodes: string
  /** real[] */
  values: string
  weightedDegrees: string
  /** integer[] */
  degrees: string
  sides: string
  states: string
  /** JSON: numbers of the ends, weight, share, 1 where lost. */
  links: string
}

const STATE_LETTERS = { heard: 'h', unheard: 'u', detached: 'd' } as const
const MOST_DEGREE = 2 ** 31 - 1

export function packMoment({ nodes, links }: Moment, numbers: ReadonlyMap<string, number>): PackedMoment {
  const placed = nodes
    .flatMap((node) => {
      const number = numbers.get(node.agentId)
      return number === undefined ? [] : [{ number, node }]
    })
    .sort((a, b) => a.number - b.number)
  const column = (of: (node: MomentNode) => string | number) =>
    `{${placed.map(({ node }) => of(node)).join(',')}}`
  return {
    nodes: rangesOf(placed.map(({ number }) => number)),
    values: column(({ value }) => real(value)),
    weightedDegrees: column(({ weightedDegree }) => real(weightedDegree)),
    degrees: column(({ degree }) => (degree === null ? 'NULL' : Math.min(MOST_DEGREE, Math.round(degree)))),
    sides: placed.map(({ node }) => node.side ?? '-').join(''),
    states: placed.map(({ node }) => STATE_LETTERS[node.state]).join(''),
    links: JSON.stringify(
      links.map(({ a, b, weight, share, lost }) => [
        numbers.get(a) ?? -1,
        numbers.get(b) ?? -1,
        short(weight),
        share === null ? null : short(share),
        lost ? 1 : 0,
      ]),
    ),
  }
}

/** Agents send any number; what four bytes cannot hold is not known. */
function real(value: number | null): string | number {
  const held = value === null ? Number.NaN : Math.fround(value)
  return Number.isFinite(held) ? held : 'NULL'
}

function short(value: number): number {
  return Number(value.toPrecision(4))
}

/** Numbers in order, as PostgreSQL writes a multirange: from, and up to but without. */
export function rangesOf(numbers: readonly number[]): string {
  const ranges: [number, number][] = []
  for (const number of numbers) {
    const last = ranges.at(-1)
    if (last && last[1] === number) last[1] = number + 1
    else ranges.push([number, number + 1])
  }
  return `{${ranges.map(([from, to]) => `[${from},${to})`).join(',')}}`
}

export function numbersOf(ranges: string): number[] {
  return [...ranges.matchAll(/\[(\d+),(\d+)\)/g)].flatMap(([, from, to]) =>
    Array.from({ length: Number(to) - Number(from) }, (_, index) => Number(from) + index),
  )
}

/** What the row gives back, arrays as JSON. */
export const momentRowSchema = z.object({
  atMs: z.number(),
  nodes: z.string(),
  values: z.array(z.number().nullable()),
  weightedDegrees: z.array(z.number().nullable()),
  degrees: z.array(z.number().nullable()),
  sides: z.string(),
  states: z.string(),
  links: z.array(z.tuple([z.number(), z.number(), z.number(), z.number().nullable(), z.number()])),
})
export type MomentRow = z.infer<typeof momentRowSchema>

export interface UnpackedNode extends Omit<MomentNode, 'agentId' | 'name' | 'labels'> {
  number: number
}

export function unpackNodes(row: MomentRow): UnpackedNode[] {
  return numbersOf(row.nodes).map((number, place) => ({
    number,
    state: stateOf(row.states[place]),
    side: sideOf(row.sides[place]),
    value: row.values[place] ?? null,
    degree: row.degrees[place] ?? null,
    weightedDegree: row.weightedDegrees[place] ?? null,
  }))
}

function stateOf(letter: string | undefined): MomentNode['state'] {
  if (letter === STATE_LETTERS.heard) return 'heard'
  return letter === STATE_LETTERS.detached ? 'detached' : 'unheard'
}

function sideOf(letter: string | undefined): MomentNode['side'] {
  return letter === 'a' || letter === 'b' ? letter : null
}
