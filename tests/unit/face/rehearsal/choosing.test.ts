import { describe, expect, it } from 'vitest'
import type { Excluded } from '@/lib/data/rehearsal-dto'
import {
  askedOf,
  type ChooseFrom,
  choiceSentence,
  chosenOf,
  type Draft,
  initialDraft,
  NOTHING,
  prefillOf,
  readPasted,
  rehearseHref,
  soonWindows,
  toggleLink,
  toggleNode,
  whenOptions,
  withBetween,
  withLabels,
} from '@/lib/face/rehearsal'
import { links, minutesAway, NOW, nodes, rehearsal, window } from './fixtures'

const named = { disclosure: 'named' as const, nodes, links }
const sealed = { ...named, disclosure: 'sealed' as const }
const exclude = (over: Partial<Excluded>): Excluded => ({ ...NOTHING, ...over })
const sentence = (over: Partial<Excluded>) => choiceSentence(exclude(over), chosenOf(exclude(over), named))

describe('the sentence before a rehearsal', () => {
  it.each<[Partial<Excluded>, string]>([
    [{}, 'Nothing is chosen yet.'],
    [{ nodes: ['tar-02', 'tar-01'] }, 'Rehearse draining 2 of 12 nodes: tar-01 and tar-02.'],
    [
      { labels: [{ key: 'office', value: 'Eelholm' }], nodes: ['eel-01', 'pin-02', 'tar-01', 'tar-02'] },
      'Rehearse draining 7 of 12 nodes: eel-01, eel-02, eel-03, eel-04, pin-02 and 2 more.',
    ],
    [{ links: [['tar-01', 'eel-01']] }, 'Rehearse cutting 1 link: tar-01 – eel-01.'],
    [
      { nodes: ['tar-03'], between: [{ key: 'office', a: 'Tarnwick', b: 'Eelholm' }] },
      'Rehearse draining 1 of 12 nodes and cutting 2 links: tar-03, eel-01 – tar-01 and eel-02 – tar-02.',
    ],
    [{ nodes: ['nobody'] }, 'Rehearse without nobody.'],
  ])('says what would be away (%#)', (over, said) => expect(sentence(over)).toBe(said))

  it('counts a node once, however often it is chosen, and none that has left', () =>
    expect(
      chosenOf(exclude({ nodes: ['eel-01', 'tar-99'], labels: [{ key: 'office', value: 'Eelholm' }] }), named)
        .nodes,
    ).toEqual(['eel-01', 'eel-02', 'eel-03', 'eel-04']))
})

describe('what stands against a rehearsal', () => {
  const problems = (over: Partial<Excluded>, from: ChooseFrom = named) =>
    chosenOf(exclude(over), from).problems

  it('is nothing for nodes that have joined, unheard or not', () =>
    expect(problems({ nodes: ['tar-01', 'pin-02'] })).toEqual([]))
  it('is a node that is away already', () =>
    expect(problems({ nodes: ['tar-99'] })).toEqual([
      'No node of this overlay is called tar-99. Choose nodes that have joined.',
    ]))
  it('is that too few would remain', () =>
    expect(
      problems({
        labels: ['Tarnwick', 'Eelholm', 'Pinnet Bay'].map((value) => ({ key: 'office', value })),
      }),
    ).toEqual(['No node would remain. Leave at least 2.']))
  it('is naming links where they are not named', () =>
    expect(problems({ links: [['tar-01', 'eel-01']] }, sealed)).toEqual([
      'This overlay is sealed: without a link its walkers would tell whether it is there. Take nodes or labels away, or rehearse links in a named overlay.',
    ]))
  it('is that fewer than half would remain where links are not named', () => {
    const labels = ['Tarnwick', 'Eelholm'].map((value) => ({ key: 'office', value }))
    const joined = chosenOf({ ...NOTHING, labels }, named)
    const remain = joined.joined - joined.nodes.length
    expect(remain).toBeGreaterThanOrEqual(2)
    expect(remain).toBeLessThan(joined.joined / 2)
    expect(joined.problems).toEqual([])
    expect(problems({ labels }, sealed)).toEqual([
      `${remain} of ${joined.joined} nodes would remain. This overlay is sealed: what holds a few nodes together would tell their links, so at least half must remain.`,
    ])
    expect(problems({ nodes: ['tar-01'] }, sealed)).toEqual([])
  })
  it('is a node of another team, and a label takes none of theirs away', () => {
    const shared = {
      ...named,
      nodes: nodes.map((node) => (node.name === 'eel-01' ? { ...node, partner: true as const } : node)),
    }
    expect(problems({ nodes: ['eel-01'] }, shared)).toEqual([
      'None of your nodes is called eel-01. Choose nodes of your team that have joined.',
    ])
    const eelholm = exclude({ labels: [{ key: 'office', value: 'Eelholm' }] })
    expect(chosenOf(eelholm, shared).nodes).toEqual(['eel-02', 'eel-03', 'eel-04'])
    expect(chosenOf(eelholm, shared).joined).toBe(12)
  })
  it('is a link that is lost', () =>
    expect(problems({ links: [['tar-02', 'tar-01']] })).toEqual([
      'There is no link tar-02 – tar-01 now. Choose links that are measured.',
    ]))
})

describe('changing the choice', () => {
  it('takes in and out again, links whichever way they are written', () => {
    const one = toggleLink(toggleNode(NOTHING, 'tar-01'), ['tar-01', 'eel-01'])
    expect(one).toEqual(exclude({ nodes: ['tar-01'], links: [['tar-01', 'eel-01']] }))
    expect(toggleLink(toggleNode(one, 'tar-01'), ['eel-01', 'tar-01'])).toEqual(NOTHING)
  })
  it('takes nothing twice', () => {
    const label = { key: 'office', value: 'Eelholm' }
    expect(withLabels(exclude({ labels: [label] }), [label]).labels).toEqual([label])
    const pair = { key: 'office', a: 'Eelholm', b: 'Tarnwick' }
    const turned = { key: 'office', a: 'Tarnwick', b: 'Eelholm' }
    expect(withBetween(exclude({ between: [pair] }), turned).between).toEqual([pair])
  })
})

describe('a pasted list', () => {
  it('is read by lines, commas and spaces, and says of each unknown name where it stands and why', () =>
    expect(readPasted('tar-01, tar-02\n\n TAR-03\r\ntar-99;eel-01 tar-01\nnobody', nodes)).toEqual({
      names: ['tar-01', 'tar-02', 'eel-01'],
      errors: [
        { line: 3, text: 'TAR-03', because: 'no node is called so; tar-03 is written otherwise' },
        { line: 4, text: 'tar-99', because: 'it is not there any more (left), so it is away already' },
        { line: 5, text: 'nobody', because: 'no node of this overlay is called so' },
      ],
    }))
  it('takes a line that is a name as a whole', () => {
    const spaced = [...nodes, ...nodes.slice(0, 1).map((one) => ({ ...one, name: 'quay 3, north' }))]
    expect(readPasted('quay 3, north', spaced)).toEqual({ names: ['quay 3, north'], errors: [] })
  })
})

describe('all that reboot tonight', () => {
  const windows = [
    window('later', 25 * 60),
    window('whole', 600, { label: null }),
    window('soon', 120),
    window('now', -10),
    window('near', 20, { label: { key: 'office', value: 'Nowhere' } }),
  ]
  const soon = soonWindows(windows, nodes, NOW)

  it('is what begins within a day, first first, with the nodes it is of', () =>
    expect(soon.map(({ id, nodes }) => [id, nodes.length])).toEqual([
      ['near', 0],
      ['soon', 4],
      ['whole', 12],
    ]))
  it('also has a window that was asked for, however late it begins', () =>
    expect(soonWindows(windows, nodes, NOW, 'later').map(({ id }) => id)).toContain('later'))
  it('can be rehearsed half an hour before, where that is still to come', () => {
    expect(soon.map(({ aheadAt }) => aheadAt)).toEqual([null, minutesAway(90), minutesAway(570)])
    expect(whenOptions(soon, NOW).map(({ value }) => value)).toEqual(['now', 'soon', 'whole', 'at'])
  })

  const draft: Draft = { exclude: NOTHING, note: ' ', incident: null, when: 'now', at: '' }
  const asked = { exclude: NOTHING, note: null, incident: null }
  it.each<[Partial<Draft>, ReturnType<typeof askedOf>]>([
    [{}, { asked: { ...asked, startsAt: null } }],
    [{ when: 'soon', note: ' a ' }, { asked: { ...asked, note: 'a', startsAt: minutesAway(90) } }],
    [{ when: 'near' }, { missing: 'That window is too near to begin ahead of it. Start now instead.' }],
    [{ when: 'at' }, { missing: 'Give the day and time it is to begin.' }],
    [{ when: 'at', at: '2031-03-12T19:59Z' }, { missing: 'Give a time that is still to come.' }],
    [{ when: 'at', at: '2031-03-12T22:00Z' }, { asked: { ...asked, startsAt: minutesAway(120) } }],
  ])('is asked for when it is to begin (%#)', (over, wanted) =>
    expect(askedOf({ ...draft, ...over }, soon, NOW)).toEqual(wanted),
  )
})

describe('a link to the filled form', () => {
  const query = (href: string) => {
    const found: Record<string, string[]> = {}
    for (const [name, value] of new URL(href, 'http://t.invalid').searchParams)
      found[name] = [...(found[name] ?? []), value]
    return found
  }
  it('brings back what it was made from, odd names and all', () => {
    const asked = exclude({
      nodes: ['tar-01', 'quay 3, north'],
      labels: [{ key: 'office', value: 'a=b' }],
      links: [['eel 1', 'tar&2']],
    })
    const href = rehearseHref('tides', { exclude: asked, window: 'w', incident: 12, from: 'r' })
    expect(prefillOf(query(href))).toEqual({ exclude: asked, window: 'w', incident: 12, from: 'r' })
    expect(rehearseHref('a b', {})).toBe('/overlays/a%20b/rehearsals')
  })
  it('is empty where it makes no sense', () =>
    expect(prefillOf({ link: 'one', incident: 'x', node: '' })).toEqual({
      exclude: NOTHING,
      window: null,
      incident: null,
      from: null,
    }))
  it('takes a window’s nodes and its name, or what was rehearsed before', () => {
    const from = { exclude: NOTHING, window: null, incident: null, from: null }
    expect(initialDraft({ ...from, window: 'soon' }, [window('soon', 120)], [])).toMatchObject({
      exclude: exclude({ labels: [{ key: 'office', value: 'Eelholm' }] }),
      note: 'work soon',
    })
    const before = rehearsal({ note: 'as last week', incident: 3 })
    expect(initialDraft({ ...from, from: 'r' }, [], [before])).toMatchObject({
      exclude: before.exclude,
      note: 'as last week',
      incident: 3,
    })
  })
})
