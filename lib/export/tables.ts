import type { OverlayLink } from '@/lib/data/dto'
import { toCsv } from '@/lib/face/csv'
import type { ExportedNode } from './graphml'

export function nodesCsv(nodes: readonly ExportedNode[]): string {
  const keys = [...new Set(nodes.flatMap(({ labels }) => Object.keys(labels)))].sort()
  return toCsv(
    [
      ...['name', 'state', 'side', 'value', 'degree', 'weightedDegree', 'version', 'heardAt'],
      ...keys.map((key) => `label.${key}`),
    ],
    nodes.map(({ name, state, side, value, degree, weightedDegree, version, heardAt, labels }) => [
      ...[name, state, side, value, degree, weightedDegree, version, heardAt],
      ...keys.map((key) => labels[key] ?? null),
    ]),
  )
}

export function linksCsv(links: readonly OverlayLink[]): string {
  return toCsv(
    ['source', 'target', 'weight', 'share', 'crossing', 'state', 'heardAt'],
    links.map(({ a, b, weight, share, crossing, state, heardAt }) => [
      ...[a, b, weight, share, crossing ? 'yes' : 'no', state, heardAt],
    ]),
  )
}
