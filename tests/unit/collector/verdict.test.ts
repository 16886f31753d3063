import { describe, expect, it } from 'vitest'
import { type VerdictFacts, verdictOf } from '@/lib/collector/verdict'

/** Harbourline when weak, as on the drafting sheet. */
const weak: VerdictFacts = {
  state: 'reading',
  joined: 36,
  heard: 36,
  late: 0,
  neverHeard: 0,
  detached: 0,
  level: 'weak',
  rule: 'few-links',
  trend: 'falling',
  treatAsSplit: null,
  singleCut: true,
  cut: { nodes: { a: 18, b: 18 }, links: 3 },
  follows: { key: 'harbour', a: ['Gullhythe', 'Tarnwick'], b: ['Eelholm', 'Pinnet Bay'] },
  shareOfUsual: 0.36,
}
const firm: Partial<VerdictFacts> = { level: 'firm', rule: null, trend: 'steady', shareOfUsual: 1.01 }
const FOLLOWS =
  'It follows the label harbour: Gullhythe and Tarnwick on one side, Eelholm and Pinnet Bay on the other.'

const table: [string, Partial<VerdictFacts>, string, string][] = [
  [
    'weak by few links',
    {},
    'Weak and falling. A weak cut parts 18 nodes from 18 and hangs on 3 links.',
    FOLLOWS,
  ],
  [
    'one link and one node are singular',
    { trend: 'steady', cut: { nodes: { a: 1, b: 35 }, links: 1 }, follows: null },
    'Weak. A weak cut parts 1 node from 35 and hangs on 1 link.',
    '',
  ],
  [
    'weak but mending',
    { trend: 'rising', follows: null },
    'Weak but rising. A weak cut parts 18 nodes from 18 and hangs on 3 links.',
    '',
  ],
  [
    'weak against the usual',
    { rule: 'below-usual', trend: null },
    'Weak. A weak cut parts 18 nodes from 18 and hangs on 3 links.',
    `${FOLLOWS} The reading is at 36 % of its usual.`,
  ],
  [
    'weak against the usual without a single cut',
    { rule: 'below-usual', trend: null, singleCut: false },
    'Weak. The reading is at 36 % of its usual.',
    'The weakest few ways of parting this overlay are about equally strong, so none is drawn as the one.',
  ],
  [
    'weak in several places',
    { trend: null, singleCut: false, cut: { nodes: { a: 12, b: 12 }, links: 2 } },
    'Weak. Several cuts are about equally weak; one of them hangs on 2 links.',
    'The weakest few ways of parting this overlay are about equally strong, so none is drawn as the one.',
  ],
  [
    'firm without a single weak cut',
    { ...firm, singleCut: false, follows: null },
    'Firm. No single weak cut.',
    'The weakest few ways of parting this overlay are about equally strong, so none is drawn as the one. Steady.',
  ],
  [
    'firm with a cut that stands out',
    { ...firm, cut: { nodes: { a: 18, b: 18 }, links: 14 } },
    'Firm. The thinnest cut found parts 18 nodes from 18 and holds on 14 links.',
    FOLLOWS,
  ],
  [
    'firm but falling',
    { ...firm, trend: 'falling', cut: { nodes: { a: 18, b: 18 }, links: 6 }, follows: null },
    'Firm but falling. The thinnest cut found parts 18 nodes from 18 and holds on 6 links.',
    '',
  ],
  ['firm before a cut is counted', { ...firm, cut: null, follows: null }, 'Firm. No single weak cut.', ''],
  [
    'some agents unheard, some nodes without a link',
    {
      ...firm,
      singleCut: null,
      follows: null,
      heard: 34,
      detached: 1,
      cut: { nodes: { a: 17, b: 16 }, links: 9 },
    },
    'Firm. The thinnest cut found parts 17 nodes from 16 and holds on 9 links.',
    '2 agents of 36 are unheard: the reading speaks of the others and may be off. 1 node has no live link and is left out.',
  ],
  [
    'split as counted',
    { level: 'split', rule: 'nothing-crosses', cut: { nodes: { a: 18, b: 18 }, links: 0 } },
    'Split. No link is left between 18 nodes and the other 18.',
    FOLLOWS,
  ],
  [
    'split by the reading alone',
    { level: 'split', rule: 'nothing-crosses', cut: null, follows: null },
    'Split. The reading is as good as zero.',
    '',
  ],
  [
    'heard again after a split, not yet settled',
    { level: 'split', rule: null, follows: null },
    'Split. So it was last judged; the reading is settling.',
    '',
  ],
  [
    'every node has lost its links',
    { state: 'too-few-nodes', level: 'split', rule: 'links-gone', detached: 36 },
    'Split. 36 of the 36 nodes heard have no live link.',
    'The agents are heard, but hardly one of them reaches a neighbour. The reading is withheld.',
  ],
  [
    'a side unheard',
    {
      state: 'unheard',
      level: 'split',
      rule: 'treat-as-split',
      heard: 18,
      treatAsSplit: { by: 'cut', nodes: 18, where: ['Eelholm', 'Pinnet Bay'] },
    },
    'Treat as split. 18 nodes are unheard, all beyond the last weak cut.',
    'Eelholm and Pinnet Bay fell silent together. What the 18 agents still heard report says nothing about the rest. The reading is withheld.',
  ],
  [
    'a label unheard, the reading of the rest goes on',
    {
      level: 'split',
      heard: 1,
      treatAsSplit: { by: 'label', nodes: 4, key: 'harbour', values: ['Eelholm'] },
    },
    'Treat as split. 4 nodes are unheard, all of harbour = Eelholm.',
    'They fell silent together. What the 1 agent still heard reports says nothing about the rest.',
  ],
  [
    'unheard here and there',
    { state: 'unheard', heard: 29, level: 'firm', rule: null },
    'Reading withheld. 7 nodes of 36 are unheard.',
    'They have neither a side of the last cut nor a label in common, so this says nothing about a split. Before, the overlay was judged firm.',
  ],
  [
    'one of few unheard',
    { state: 'unheard', joined: 4, heard: 3, level: null, rule: null },
    'Reading withheld. 1 node of 4 is unheard.',
    'Whether it stopped or was cut off cannot be told from here.',
  ],
  [
    'all unheard',
    { state: 'unheard', heard: 0, level: 'weak', rule: null },
    'Reading withheld. No agent is heard.',
    'All fell silent: look first at the collector and its own connection. Before, the overlay was judged weak.',
  ],
  [
    'late',
    { state: 'late', late: 9, level: null, rule: null },
    'Reading withheld. 9 agents of 36 are late.',
    'Too many reports are missing; agents that stay silent will count as unheard.',
  ],
  [
    'nothing joined',
    { state: 'nothing-joined', joined: 0, heard: 0, level: null, rule: null },
    'No agents have joined yet.',
    'Create a joining code and enrol an agent beside each node.',
  ],
  [
    'enrolled but not started',
    { state: 'not-heard-yet', heard: 35, neverHeard: 1, level: null, rule: null },
    'Waiting to hear 1 agent of 36 for the first time.',
    'Start the agents that have enrolled.',
  ],
  [
    'heard but not linked',
    { state: 'too-few-nodes', joined: 1, heard: 1, level: null, rule: null },
    'Waiting for links between the nodes.',
    '1 agent of 1 is heard. A reading takes at least two nodes with a live link.',
  ],
  [
    'starting',
    { state: 'starting', level: null, rule: null },
    'Measuring has begun.',
    'The walkers are being placed; the first reading follows.',
  ],
  [
    'settling for the first time',
    { level: null, rule: null, follows: null },
    'The first reading is settling.',
    'The walkers have not yet come to rest, so no level is given.',
  ],
]

describe('the verdict', () => {
  it.each(table)('%s', (_, facts, verdict, detail) => {
    expect(verdictOf({ ...weak, ...facts })).toEqual({ verdict, detail })
  })
})
