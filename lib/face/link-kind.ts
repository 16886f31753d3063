import type { Reading } from '@/lib/data/dto'
import type { LinkKind } from '@/lib/method/report'

export interface LinkKindWords {
  /** In a figure or a table. */
  short: string
  /** What it means for whoever relies on the reading. */
  sentence: string
}

const WORDS: Record<LinkKind | 'mixed', LinkKindWords> = {
  path: {
    short: 'the path',
    sentence:
      'Agents measure the path between two hosts, beside the overlay’s own connections: one can be up while the other is down.',
  },
  'path-with-view': {
    short: 'the path with the node’s view',
    sentence:
      'Agents measure the path between two hosts, and the node’s own view of each link lowers what they find: a link that the node calls down counts as down.',
  },
  connection: {
    short: 'the connection itself',
    sentence:
      'Frames ride on the overlay’s own connections: what is measured is what the overlay’s data travels on.',
  },
  mixed: {
    short: 'not the same everywhere',
    sentence:
      'Some agents measure the path beside the overlay’s connections, others the connection itself: the Nodes page says which does what.',
  },
}

/** Null where no agent has said. */
export function linkKindWords(kind: Reading['linkKind']): LinkKindWords | null {
  return kind ? WORDS[kind] : null
}
