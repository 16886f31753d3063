import { describe, expect, it } from 'vitest'
import type { WeakPlace } from '@/lib/data/weak-dto'
import { LASTS } from '@/lib/data/weak-dto'
import { curvePath, withBreaks } from '@/lib/face/curve'
import { nearestMoment } from '@/lib/face/moments'
import { RANGES } from '@/lib/face/range'
import { hiddenLinksText, neighboursOf } from '@/lib/face/story'
import { findNodes, layoutStretch, type Step, walkFrom, zoomBy } from '@/lib/face/stretch'
import { pathPart } from '@/lib/face/urls'
import {
  ageText,
  cheegerSentence,
  courseText,
  type FollowedLabel,
  followsSentence,
  leftOutText,
  pText,
  runnerUpSentence,
} from '@/lib/face/weak'
import { asCut } from '@/lib/face/weak-cut'
import { labelsOfEnds } from '@/lib/face/weak-links'

const label = (over: Partial<FollowedLabel> = {}): FollowedLabel => ({
  ...{ key: 'office', values: 4, labelled: 36, unlabelled: 0, adjusted: 1, p: 0.001, permutations: 999 },
  exactly: { a: ['Gullhythe', 'Tarnwick'], b: ['Eelholm', 'Pinnet Bay'] },
  ...over,
})
const follows = (...labels: FollowedLabel[]): WeakPlace['follows'] => ({ nodes: 36, labels, leftOut: [] })

describe('what the cut follows, in words', () => {
  it.each([
    [
      'names the values on either side',
      follows(label()),
      'It follows office: Gullhythe, Tarnwick on side a, Eelholm, Pinnet Bay on side b.',
    ],
    [
      'says of how many nodes it is',
      follows(label({ labelled: 24, unlabelled: 12 })),
      'It follows office, of the 24 nodes that have it: Gullhythe, Tarnwick on side a, Eelholm, Pinnet Bay on side b.',
    ],
    [
      'does not overstate what is not exact',
      follows(label({ adjusted: 0.7, exactly: null })),
      'It mostly follows office.',
    ],
    [
      'nor what tells little',
      follows(label({ adjusted: 0.2, exactly: null })),
      'It leans on office, and does not follow it.',
    ],
    [
      'nor what may be chance, exact or not',
      follows(label({ p: 0.1 })),
      'The cut follows none of the labels: what they say of the sides may be chance.',
    ],
    [
      'asks for labels where there are none',
      follows(),
      'The nodes have no labels. With labels (office, region, provider) this says what the cut follows.',
    ],
    [
      'says that no label can tell',
      {
        ...follows(),
        leftOut: [{ key: 'host', values: 36, labelled: 36, because: 'nearly-unique' as const }],
      },
      'None of the labels can tell the sides apart: they are the same everywhere, or another on nearly every node.',
    ],
    [
      'says that no side is known',
      { ...follows(), nodes: 0 },
      'No node has told its side. Where links are not named, nodes do once one cut has been clearly the weakest for some time.',
    ],
  ])('%s', (_, given, sentence) => expect(followsSentence(given)).toBe(sentence))

  it('gives the least chance that can be found as a bound, and rounds others up', () => {
    expect([0.001, 0.0121, 1].map((p) => pText({ p, permutations: 999 }))).toEqual([
      '≤ 0.001',
      '0.013',
      '1.000',
    ])
    expect(pText({ p: 0.005, permutations: 199 })).toBe('≤ 0.005')
  })

  it('says what was left out, and why', () => {
    const leftOut = [
      { key: 'host', values: 36, labelled: 36, because: 'nearly-unique' as const },
      { key: 'region', values: 1, labelled: 36, because: 'one-value' as const },
    ]
    expect(leftOutText({ ...follows(), leftOut })).toBe(
      'Left out: host (another value on nearly every node), region (one value only).',
    )
    expect(leftOutText(follows(label()))).toBeNull()
  })
})

describe('the figures of a cut, in words', () => {
  const figures = { expansion: 0.4163, conductance: 0.17, lambda2AtMost: 0.83, least: 0.1447, most: 1.3267 }

  it('say how near it is to the weakest there can be, bounds rounded outward', () => {
    expect(cheegerSentence({ figures })).toBe(
      'No cut of this overlay has less than 0.144 crossing weight per node of its smaller side; this one has 0.416, so it is at most 2.9 times the weakest there can be. Some cut has at most 1.327.',
    )
    expect(cheegerSentence({ figures: { ...figures, expansion: 0.1447, most: null } })).toMatch(
      /so it is the weakest there is\.$/,
    )
    for (const none of [
      null,
      { ...figures, least: null },
      { ...figures, expansion: null },
      { ...figures, least: 0 },
    ])
      expect(cheegerSentence({ figures: none })).toBeNull()
  })

  it('tell of the next place, or that there is none', () => {
    const runnerUp = { sides: [9, 27] as [number, number], links: 6, weight: 5.5, expansion: 0.611 }
    expect(runnerUpSentence({ runnerUp, figures })).toBe(
      'The next place parts 9 nodes from 27 and holds on at most 6 links of 5.500 weight together, 1.5 times as strong for each node of the smaller side.',
    )
    expect(runnerUpSentence({ runnerUp: null, figures })).toContain('No second weak place stands out')
  })
})

describe('a link, in words', () => {
  const now = Date.parse('2031-05-06T12:00:00.000Z')

  it('has an age, and says where it is only a bound', () => {
    expect(ageText({ at: '2031-05-06T09:00:00.000Z', atLeast: false }, now)).toBe('3 h')
    expect(ageText({ at: '2031-05-04T09:00:00.000Z', atLeast: true }, now)).toBe('over 2 d')
    expect(ageText(null, now)).toBe('not known')
  })

  it('has a course, once there are two moments of it', () => {
    expect(
      courseText([
        [1, 1, 0.1],
        [2, 1, null],
        [3, 1, 0.6],
      ]),
    ).toBe('10\u202f% to 60\u202f%')
    expect(courseText([[1, 1, 0.1]])).toBeNull()
  })

  it('has ends of which the label says where they are', () => {
    const nodes = [{ name: 'tar-01', labels: { office: 'Tarnwick' }, state: 'heard' as const }]
    expect(labelsOfEnds({ a: 'eel-07', b: 'tar-01' }, nodes, 'office')).toEqual([
      { name: 'eel-07', label: null },
      { name: 'tar-01', label: 'Tarnwick' },
    ])
  })
})

describe('a walk over the drawing', () => {
  const node = (name: string, office: string, value: number) => ({
    ...{ name, labels: { office }, value, side: value < 0 ? ('a' as const) : ('b' as const) },
    ...{ state: 'heard' as const, degree: 3 },
  })
  const layout = layoutStretch({
    nodes: [
      node('tar-01', 'Tarnwick', -1.2),
      node('tar-02', 'Tarnwick', -0.8),
      node('eel-08', 'Eelholm', 0.9),
      node('eel-07', 'Eelholm', 1.3),
    ],
    ...{ links: [], laneKey: 'office', sided: true, crossingLinks: 2, silent: false, width: 900 },
  })

  it.each([
    ['begins at the left', null, 'right', 'tar-01'],
    ['goes on to the right', 'tar-01', 'right', 'tar-02'],
    ['stays at the end', 'eel-07', 'right', 'eel-07'],
    ['goes back', 'eel-08', 'left', 'tar-02'],
    ['jumps to either end', 'tar-02', 'last', 'eel-07'],
    ['goes down to the nearest of the next lane', 'tar-02', 'down', 'eel-08'],
    ['and up again', 'eel-07', 'up', 'tar-02'],
    ['stays where there is no further lane', 'tar-02', 'up', 'tar-02'],
    ['begins anew where its node has gone', 'pin-02', 'left', 'tar-01'],
  ] as [string, string | null, Step, string][])('%s', (_, from, step, to) =>
    expect(walkFrom(layout, from, step)).toBe(to),
  )

  it('finds nodes by name and label, from left to right', () => {
    expect(findNodes(layout.dots, 'TAR')).toEqual(['tar-01', 'tar-02'])
    expect(findNodes(layout.dots, 'office=eelholm 7')).toEqual(['eel-07'])
    expect(findNodes(layout.dots, '  ')).toEqual([])
  })

  it('zooms in steps, within bounds', () => {
    expect([zoomBy(1, 1), zoomBy(1, -1), zoomBy(8, 1), zoomBy(3, -1)]).toEqual([1.5, 1, 8, 2])
  })
})

describe('small curves', () => {
  const box = { width: 100, height: 40, pad: 0, fromMs: 0, toMs: 100, least: 0, most: 2 }
  it('run from left to right, and break where nothing was kept', () => {
    expect(
      curvePath(
        [
          [0, 0],
          [50, 1],
          [100, 2],
        ],
        box,
      ),
    ).toBe('M0 40L50 20L100 0')
    expect(
      curvePath(
        withBreaks(
          [
            [0, 0],
            [10, 1],
            [90, 2],
            [100, 2],
          ],
          35,
        ),
        box,
      ),
    ).toBe('M0 40L10 20M90 0L100 0')
  })
})

describe('the pages', () => {
  it('know every range the trend knows', () => expect(RANGES.map(({ id }) => id)).toEqual([...LASTS]))

  it('find the kept moment that is nearest', () => {
    const items = [10, 20, 40].map((second) => ({
      ...{ at: new Date(second * 1000).toISOString(), lambda2: 1, level: null, crossingLinks: null },
    }))
    expect([0, 16_000, 90_000].map((ms) => nearestMoment(items, ms))).toEqual([
      items[0]!.at,
      items[1]!.at,
      items[2]!.at,
    ])
    expect(nearestMoment([], 5)).toBeNull()
  })

  it('read their own addresses, and do not fall over others', () => {
    expect([pathPart('tar%2001'), pathPart('tar-01'), pathPart('%E0%A4%A')]).toEqual([
      'tar 01',
      'tar-01',
      '%E0%A4%A',
    ])
  })

  it('name neighbours, and say why they are only counted', () => {
    const link = {
      a: 'eel-07',
      b: 'tar-01',
      weight: 1,
      share: null,
      crossing: true,
      state: 'live' as const,
      heardAt: '',
    }
    expect(
      neighboursOf({ node: { name: 'tar-01' } as never, links: [link] }).map(({ name }) => name),
    ).toEqual(['eel-07'])
    expect(hiddenLinksText({ disclosure: 'named', unnamed: 0, links: [] })).toBeNull()
    expect(hiddenLinksText({ disclosure: 'sealed', unnamed: 3, links: [] })).toContain(
      '3 links are measured and not named: this overlay is sealed',
    )
    expect(hiddenLinksText({ disclosure: 'flagged', unnamed: 1, links: [link] })).toContain(
      '1 further link is not named',
    )
  })

  it('hand the drawing the label that the sides follow exactly', () => {
    const place = {
      at: '',
      sides: null,
      withheld: null,
      crossing: null,
      links: [],
      follows: follows(label({ key: 'rack', exactly: null }), label()),
    }
    expect(asCut(place as unknown as WeakPlace).follows).toEqual({ key: 'office', ...label().exactly })
  })
})
