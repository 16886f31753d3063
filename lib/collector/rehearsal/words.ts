import type { Excluded } from '@/lib/data/rehearsal-dto'
import { countOf, listOf } from '../words'

/** What is taken away, for a person: "tar-01, tar-02 and all nodes with office Eelholm". */
export function takenWords({ nodes, links, labels, between }: Excluded): string {
  const parts = [
    ...(nodes.length > 0 ? [nodes.length > 4 ? countOf(nodes.length, 'node') : listOf(nodes)] : []),
    ...labels.map(({ key, value }) => `all nodes with ${key} ${value}`),
    ...(links.length > 0
      ? [links.length > 2 ? countOf(links.length, 'link') : listOf(links.map(([a, b]) => `${a} – ${b}`))]
      : []),
    ...between.map(({ key, a, b }) => `the links between ${key} ${a} and ${b}`),
  ]
  return listOf(parts)
}
