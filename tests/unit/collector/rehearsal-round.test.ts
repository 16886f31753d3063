import { describe, expect, it } from 'vitest'
import type { OpenRehearsal } from '@/lib/collector/rehearsal/open'
import { planRehearsals } from '@/lib/collector/rehearsal/round'
import { failureSentence, verdictSentence } from '@/lib/collector/rehearsal/verdict'
import type { RehearsalResult } from '@/lib/data/rehearsal-dto'

const agents = Array.from({ length: 12 }, (_, at) => ({
  agentId: `id-${at}`,
  name: `tar-${at}`,
  labels: { office: at < 6 ? 'Tarnwick' : 'Eelholm' },
  teamId: 'harbourline',
}))
const from = { disclosure: 'named' as const, agents, links: [{ a: 'tar-0', b: 'tar-6' }] }
const NONE = { nodes: [], links: [], labels: [], between: [] }
const open = (id: string, over: Partial<OpenRehearsal> = {}): OpenRehearsal => ({
  id,
  teamId: 'harbourline',
  incidentId: null,
  state: 'waiting',
  startsAtMs: null,
  startedAtMs: null,
  progress: 0,
  exclude: { ...NONE, nodes: ['tar-1'] },
  taken: null,
  remain: null,
  result: null,
  verdict: null,
  plan: null,
  ...over,
})

describe('which rehearsals run', () => {
  it('those that do, then those that are due, three at most', () => {
    const rows = [
      open('planned', { startsAtMs: 2_000 }),
      open('first'),
      open('due', { startsAtMs: 500 }),
      open('runs', { state: 'running', startedAtMs: 100 }),
      open('waits'),
    ]
    const { rehearsed, running, refused } = planRehearsals(rows, from, 1_000)
    expect(rehearsed.map(({ id }) => id)).toEqual(['runs', 'first', 'due'])
    expect(running.map(({ isNew }) => isNew)).toEqual([false, true, true])
    expect(refused).toEqual([])
  })

  it('labels and label pairs are those of the moment it begins', () => {
    const labels = [{ key: 'office', value: 'Eelholm' }]
    const between = [{ key: 'office', a: 'Eelholm', b: 'Tarnwick' }]
    const rows = [
      open('label', { exclude: { ...NONE, labels } }),
      open('pair', { exclude: { ...NONE, between } }),
    ]
    expect(planRehearsals(rows, from, 0).rehearsed).toEqual([
      { id: 'label', agents: ['id-10', 'id-11', 'id-6', 'id-7', 'id-8', 'id-9'], links: [] },
      { id: 'pair', agents: [], links: [['id-0', 'id-6']] },
    ])
  })

  it('who has left since it was asked for is away already; where nobody is left of it, it fails and says so', () => {
    const rows = [
      open('partly', { exclude: { ...NONE, nodes: ['tar-1', 'gul-9'] } }),
      open('wholly', { exclude: { ...NONE, nodes: ['gul-9'] } }),
    ]
    const { rehearsed, refused } = planRehearsals(rows, from, 0)
    expect(rehearsed).toEqual([{ id: 'partly', agents: ['id-1'], links: [] }])
    expect(refused).toMatchObject([
      {
        id: 'wholly',
        state: 'failed',
        verdict: 'Nothing of what was to be away is there now. Rehearse something else.',
        says: { kind: 'rehearsal-ended' },
      },
    ])
  })

  it('of a team take away its own nodes alone, whatever others call theirs', () => {
    const skerry = { agentId: 'id-s', name: 'ske-0', labels: { office: 'Eelholm' }, teamId: 'skerry' }
    const shared = { ...from, agents: [...agents, skerry] }
    const labels = [{ key: 'office', value: 'Eelholm' }]
    const rows = [
      open('partner’s label', { teamId: 'skerry', exclude: { ...NONE, labels } }),
      open('another’s node', { teamId: 'skerry', exclude: { ...NONE, nodes: ['tar-1'] } }),
      open('owner’s', { exclude: { ...NONE, nodes: ['tar-1', 'ske-0'] } }),
    ]
    const { rehearsed, refused } = planRehearsals(rows, shared, 0)
    expect(rehearsed).toEqual([
      { id: 'partner’s label', agents: ['id-s'], links: [] },
      { id: 'owner’s', agents: ['id-1'], links: [] },
    ])
    expect(refused.map(({ id }) => id)).toEqual(['another’s node'])
  })

  it('teams take turns, so that none waits for all of another’s', () => {
    const rows = [
      open('runs', { state: 'running', startedAtMs: 100 }),
      open('second'),
      open('third'),
      open('theirs', { teamId: 'skerry' }),
      open('theirs too', { teamId: 'skerry' }),
    ]
    const ofTeams = {
      ...from,
      agents: [...from.agents, { ...from.agents[1]!, agentId: 'id-s', teamId: 'skerry' }],
    }
    const { rehearsed } = planRehearsals(rows, ofTeams, 0)
    expect(rehearsed.map(({ id }) => id)).toEqual(['runs', 'theirs', 'second'])
  })

  it('one that tries a wave takes away that wave alone, under a name of its own', () => {
    const plan = { held: [], left: ['tar-1', 'tar-2'], tried: ['tar-2'], tries: 3 }
    const rows = [open('waves', { state: 'running', exclude: { ...NONE, nodes: ['tar-1', 'tar-2'] }, plan })]
    expect(planRehearsals(rows, from, 0).rehearsed).toEqual([{ id: 'waves 3', agents: ['id-2'], links: [] }])
  })
})

describe('what is said of the answer', () => {
  const result: RehearsalResult = {
    reading: { lambda2: 0.3123, low: 0.31, high: 0.32 },
    level: 'weak',
    sides: [
      { name: 'a', nodes: 5 },
      { name: 'b', nodes: 6 },
    ],
    crossingLinks: 2,
    live: { lambda2: 0.52, low: 0.51, high: 0.53 },
    floor: { lambda2: 0.4, because: 'warning rule: reading under 0.4' },
    answer: 'below-floor',
    waves: null,
  }
  const plain = { alone: 0, loose: 0 }
  const table: [string, Partial<RehearsalResult>, Parameters<typeof verdictSentence>[2], string][] = [
    [
      'below the floor',
      {},
      plain,
      'It does not hold. Without tar-01 the reading would be 0.312, now 0.52, below the floor of 0.4; 2 links would hold 5 nodes and 6 nodes together.',
    ],
    [
      'holds, without loose ends and a single cut',
      {
        answer: 'holds',
        reading: { lambda2: 0.45, low: 0.44, high: 0.46 },
        sides: null,
        crossingLinks: null,
      },
      { alone: 0, loose: 2 },
      'It holds. Without tar-01 the reading would be 0.45, now 0.52, not below the floor of 0.4. Loose ends, 2 nodes, are left out of it.',
    ],
    [
      'no floor',
      { answer: 'holds', floor: null, sides: null, crossingLinks: null, live: null },
      plain,
      'Without tar-01 the reading would be 0.312. No floor is set to hold it against.',
    ],
    [
      'splits with a node that has no link left',
      { answer: 'splits' },
      { alone: 1, loose: 0 },
      'It splits. Without tar-01 1 node would have no link left.',
    ],
    [
      'splits, while the cut that was counted is another',
      { answer: 'splits', crossingLinks: 2 },
      plain,
      'It splits. Without tar-01 what remains would fall apart.',
    ],
    [
      'splits in two',
      { answer: 'splits', crossingLinks: 0 },
      plain,
      'It splits. Without tar-01 no link would join 5 nodes and 6 nodes.',
    ],
  ]
  it.each(table)('%s', (_name, over, estimate, sentence) => {
    expect(verdictSentence('tar-01', { ...result, ...over }, estimate)).toBe(sentence)
  })

  it('names agents that are too old', () => {
    expect(failureSentence('too-old', ['tar-01', 'gul-04'])).toBe(
      'tar-01 and gul-04 are too old to rehearse. Offer a newer agent under "Upkeep", then repeat it.',
    )
  })
})
