import type { OverlayNode } from '@/lib/data/dto'

/** More label keys than this and they share one column. */
export const MAX_LABEL_COLUMNS = 2
/** More pairs than a person chooses from: the text filter takes key=value as well. */
const MAX_LABEL_CHOICES = 200

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

/** The pairs worth choosing from, as key=value: those that not every node has. Empty where there are too many. */
export function labelChoices(nodes: readonly OverlayNode[]): string[] {
  const counts = new Map<string, number>()
  for (const { labels } of nodes)
    for (const [key, value] of Object.entries(labels)) {
      const pair = `${key}=${value}`
      counts.set(pair, (counts.get(pair) ?? 0) + 1)
    }
  const choices = [...counts].filter(([, count]) => count < nodes.length).map(([pair]) => pair)
  return choices.length <= MAX_LABEL_CHOICES ? choices.sort() : []
}

/** Whether a node has the label a choice names; keys have no equals sign. */
export function hasLabel(node: OverlayNode, choice: string): boolean {
  const at = choice.indexOf('=')
  return node.labels[choice.slice(0, at)] === choice.slice(at + 1)
}
