import { describe, expect, it } from 'vitest'
import { unheardTogether, type WatchedAgent } from '@/lib/collector/unheard'

const INTERVAL_MS = 2_000
const SILENT_AT = 100_000

/** tar-00 … on side a in Tarnwick, eel-00 … on side b in Eelholm; all heard. */
function agents(onA: number, onB: number): WatchedAgent[] {
  const side = (name: 'a' | 'b', prefix: string, harbour: string, count: number): WatchedAgent[] =>
    Array.from({ length: count }, (_, index) => ({
      agentId: `${prefix}-${String(index).padStart(2, '0')}`,
      heard: true,
      heardAtMs: 200_000,
      side: name,
      labels: { harbour },
    }))
  return [...side('a', 'tar', 'Tarnwick', onA), ...side('b', 'eel', 'Eelholm', onB)]
}

interface Change {
  silent?: string[]
  /** When each of `silent` was last heard; else all at once. */
  atMs?: (index: number) => number | null
  /** Leaves the sides unknown. */
  noSides?: boolean
  labels?: (agent: WatchedAgent, index: number) => Record<string, string>
}

function watched(onA: number, onB: number, change: Change): WatchedAgent[] {
  const silent = change.silent ?? []
  return agents(onA, onB).map((agent, index) => {
    const at = silent.indexOf(agent.agentId)
    const labels = change.labels?.(agent, index) ?? agent.labels
    const side = change.noSides ? null : agent.side
    if (at < 0) return { ...agent, labels, side }
    return { ...agent, labels, side, heard: false, heardAtMs: change.atMs ? change.atMs(at) : SILENT_AT }
  })
}

const names = (prefix: string, count: number, from = 0): string[] =>
  Array.from({ length: count }, (_, index) => `${prefix}-${String(index + from).padStart(2, '0')}`)

const beyond = (agentIds: string[], side: 'a' | 'b' = 'b') => ({ by: 'cut', side, agentIds })

const table: [string, WatchedAgent[], unknown][] = [
  ['nobody unheard: nothing', watched(18, 18, {}), null],
  [
    'a whole side unheard is beyond the cut',
    watched(18, 18, { silent: names('eel', 18) }),
    beyond(names('eel', 18)),
  ],
  ['the other side as well', watched(18, 18, { silent: names('tar', 18) }), beyond(names('tar', 18), 'a')],
  ['nine in ten of a side will do', watched(20, 20, { silent: names('eel', 18) }), beyond(names('eel', 18))],
  ['fewer will not', watched(20, 20, { silent: names('eel', 17) }), null],
  [
    'a tenth of the other side may be silent with it',
    watched(20, 20, { silent: [...names('eel', 20), ...names('tar', 2)] }),
    beyond([...names('tar', 2), ...names('eel', 20)]),
  ],
  [
    'more of the other side says nothing',
    watched(20, 20, { silent: [...names('eel', 20), ...names('tar', 3)] }),
    null,
  ],
  [
    'where everyone is unheard the fault may be the collector’s',
    watched(18, 18, { silent: [...names('tar', 18), ...names('eel', 18)] }),
    null,
  ],
  ['one agent alone may just have stopped', watched(5, 1, { silent: ['eel-00'] }), null],
  ['with one node on either side as well', watched(1, 1, { silent: ['eel-00'] }), null],
  [
    'two that are a whole side are together',
    watched(4, 2, { silent: names('eel', 2) }),
    beyond(names('eel', 2)),
  ],
  [
    'falling silent one soon after the other is together',
    watched(18, 18, { silent: names('eel', 18), atMs: (index) => SILENT_AT + index * 3 * INTERVAL_MS }),
    beyond(names('eel', 18)),
  ],
  [
    'long after one another is not',
    watched(18, 18, { silent: names('eel', 18), atMs: (index) => SILENT_AT + index * 3.1 * INTERVAL_MS }),
    null,
  ],
  [
    'whoever was silent long before is not counted against the rest',
    watched(18, 18, { silent: names('eel', 18), atMs: (index) => (index < 6 ? 0 : SILENT_AT) }),
    beyond(names('eel', 12, 6)),
  ],
  [
    'agents that were never heard did not fall silent',
    watched(18, 18, { silent: names('eel', 18), atMs: () => null }),
    null,
  ],
  [
    'without sides a label they share will do',
    watched(18, 18, { silent: names('eel', 18), noSides: true }),
    { by: 'label', key: 'harbour', values: ['Eelholm'], agentIds: names('eel', 18) },
  ],
  [
    'several whole values of a label too',
    watched(4, 4, {
      silent: names('eel', 4),
      noSides: true,
      labels: ({ side }, index) => ({
        harbour: side === 'a' ? 'Tarnwick' : index % 2 ? 'Eelholm' : 'Pinnet Bay',
      }),
    }),
    { by: 'label', key: 'harbour', values: ['Eelholm', 'Pinnet Bay'], agentIds: names('eel', 4) },
  ],
  ['a part of a value is not enough', watched(18, 18, { silent: names('eel', 9), noSides: true }), null],
  [
    'a label that everyone shares says nothing',
    watched(4, 4, { silent: names('eel', 3), noSides: true, labels: () => ({ country: 'Norrland' }) }),
    null,
  ],
  [
    'a label that differs on every node says nothing',
    watched(4, 4, { silent: names('eel', 3), noSides: true, labels: ({ agentId }) => ({ host: agentId }) }),
    null,
  ],
  [
    'without sides and labels nothing can be said',
    watched(4, 4, { silent: names('eel', 4), noSides: true, labels: () => ({}) }),
    null,
  ],
]

describe('agents unheard together', () => {
  it.each(table)('%s', (_, given, expected) => {
    expect(unheardTogether(given, INTERVAL_MS)).toEqual(expected)
  })
})
