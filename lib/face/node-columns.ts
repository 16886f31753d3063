import type { OverlayNode } from '@/lib/data/dto'

/** More label keys than this and they share one column. */
export const MAX_LABEL_COLUMNS = 3

export function labelKeysOf(nodes: readonly OverlayNode[]): string[] {
  return [...new Set(nodes.flatMap((n) => Object.keys(n.labels)))].sort()
}

/** All labels in one piece of text: "harbour=Tarnwick; rack=r2". */
export function labelText(labels: OverlayNode['labels']): string {
  return Object.entries(labels)
    .sort(([p], [q]) => (p < q ? -1 : 1))
    .map(([key, value]) => `${key}=${value}`)
    .join('; ')
}

/** Label keys worth a filter of their own: at least two values, and few enough to choose from. */
export function filterKeys(nodes: readonly OverlayNode[]): { key: string; values: string[] }[] {
  return labelKeysOf(nodes).flatMap((key) => {
    const values = [...new Set(nodes.map((n) => n.labels[key]).filter((v) => v !== undefined))].sort()
    return values.length >= 2 && values.length <= 40 ? [{ key, values }] : []
  })
}
