import { describe, expect, it } from 'vitest'
import type { Cut, OverlayLink, OverlayNode, Reading } from '@/lib/data/dto'
import { ifItGoes, whyHidden } from '@/lib/face/crossing'
import { firstReadingSeconds, staleAfterMs } from '@/lib/face/expect'
import { titleFigures } from '@/lib/face/figures'
import { labelText } from '@/lib/face/node-columns'
import { overlayOfPath, overlayPages } from '@/lib/face/pages'
import { parseSheetChoice, sheetCookie } from '@/lib/face/sheet-choice'
import { slugOf } from '@/lib/face/slug'
import {
  drawsSides,
  gapText,
  nodeReadout,
  stretchSentence,
  unplacedRemark,
} from '@/lib/face/stretch-sentence'

const at = '2031-03-12T11:46:00.000Z'
const weak: Reading = {
  at,
  lambda2: 0.2381,
  low: 0.2312,
  high: 0.24478,
  confidence: 0.9,
  core: null,
  lambda3AtMost: 0.98301,
  crossCheck: 0.2412,
  check: 'agrees',
  level: 'weak',
  trend: 'falling',
  data: 'fresh',
  verdict: '',
  detail: '',
  treatAsSplit: false,
  singleCut: true,
  usual: 0.66,
  sides: [
    { name: 'a', nodes: 18 },
    { name: 'b', nodes: 18 },
  ],
  crossingLinks: 3,
  crossingWeight: 2.46,
  looseEnds: [],
  coverage: { linksKnown: 118, linksMeasured: 111, joined: 36, heard: 36, unheard: 0 },
  seedings: [1],
  last: { at, lambda2: 0.2381 },
  demo: false,
}
const cut: Cut = {
  at,
  sides: weak.sides,
  withheld: null,
  crossingLinks: 3,
  crossingWeight: 2.46,
  links: [],
  follows: null,
}
const link: OverlayLink = {
  a: 'gul-01',
  b: 'pin-04',
  weight: 0.82,
  share: 0.21,
  crossing: true,
  state: 'live',
  heardAt: at,
}
const told = (reading: Partial<Reading>) =>
  Object.fromEntries(titleFigures({ ...weak, ...reading }).map((f) => [f.id, `${f.value} | ${f.remark}`]))

describe('title block', () => {
  it('tells a weak reading whole, bounds rounded outward', () => {
    expect(told({})).toEqual({
      reading: '0.238 | 90 %: 0.231–0.245',
      usual: '36\u202f% | median 0.660',
      next: '0.984 | at most 4.1 times stronger',
      check: '0.241 | agrees',
      links: '111 of 118 | 7 not measured',
      agents: '36 of 36 | all',
    })
  })

  it('shows the last value while the reading is withheld, and what is unheard', () => {
    const coverage = { linksKnown: 118, linksMeasured: 54, joined: 36, heard: 18, unheard: 18 }
    const figures = told({
      lambda2: null,
      low: null,
      high: null,
      crossCheck: null,
      lambda3AtMost: null,
      coverage,
    })
    expect(figures).toMatchObject({
      reading: 'withheld | last 0.238',
      usual: '36\u202f% | last value; median 0.660',
      check: '– | not known',
      agents: '18 of 36 | 18 unheard',
    })
  })

  it('puts the core first where ends are loose', () => {
    const core = { lambda2: 0.51, low: 0.4901, high: 0.5339 }
    expect(told({ core, looseEnds: [{ nodes: 3, links: 1 }] })).toMatchObject({
      reading: '0.510 | 90 %: 0.490–0.534, with loose ends 0.238',
      ends: '3 nodes | on 1 link',
      check: '0.241 | agrees, loose ends and all',
    })
  })

  it('says that a disagreeing check makes the reading unfit, and what usual still needs', () => {
    expect(told({ crossCheck: 0.31, check: 'apart', usual: null })).toMatchObject({
      check: '0.310 | disagrees by 30\u202f%: do not rely on the reading',
      usual: 'not yet | needs 7 days of readings',
    })
  })

  it.each([
    ['not in line yet', { check: 'unsure' }],
    ['settling with the reading', { check: 'unsure', data: 'settling' }],
    ['as good as zero', { check: null, level: 'split' }],
    ['not compared', { check: undefined }],
  ] as [string, Partial<Reading>][])('says of a check that decides nothing: %s', (remark, over) => {
    expect(told({ crossCheck: 0.31, ...over })).toMatchObject({ check: `0.310 | ${remark}` })
  })

  it('gives each piece of a split overlay a figure', () => {
    const piece = { side: null, label: null, low: null, high: null, settling: false }
    const figures = titleFigures({
      ...weak,
      level: 'split',
      parts: [
        { ...piece, side: 'a', nodes: 18, lambda2: 2.0481, low: 2.0111, high: 2.0911 },
        { ...piece, nodes: 17, lambda2: 1.5, label: { key: 'harbour', values: ['Eelholm'] }, settling: true },
        { ...piece, nodes: 2, lambda2: null, settling: true },
        { ...piece, nodes: 1, lambda2: null },
      ],
    })
    expect(figures.slice(1, 5).map(({ label, value, remark }) => `${label} | ${value} | ${remark}`)).toEqual([
      'side a by itself | 2.048 | 18 nodes; 2.011–2.092',
      'piece 2 by itself | 1.500 | 17 nodes · Eelholm; settling',
      'piece 3 by itself | being read | 2 nodes; settling',
      'piece 4 by itself | alone | 1 node',
    ])
  })

  it('says nothing it does not know before the first reading', () => {
    const none = {
      lambda2: null,
      low: null,
      high: null,
      last: null,
      usual: null,
      lambda3AtMost: null,
      crossCheck: null,
    }
    expect(told(none)).toMatchObject({
      reading: 'none yet | the first one is on its way',
      next: '– | not known',
    })
  })
})

describe('crossing links', () => {
  it('gives an upper bound on what is left, and says when it is the last', () => {
    expect(ifItGoes(link, 0.2381, 3)).toBe('the reading falls to 0.189 or lower')
    expect(ifItGoes(link, 0.2381, 1)).toBe('the overlay falls apart')
    expect(ifItGoes({ ...link, state: 'lost' }, 0.2381, 3)).toBeNull()
    expect(ifItGoes(link, 0.2381, 3, new Set(['pin-04']))).toBe('pin-04 unheard')
    expect(ifItGoes({ ...link, share: null }, 0.2381, 3)).toBeNull()
  })

  it('says why links are not named, and nothing when all are', () => {
    expect(whyHidden(cut, 'sealed')).toMatch(/sealed: .* 3 links over the cut are counted and none is named/)
    expect(whyHidden({ ...cut, links: [link] }, 'flagged')).toMatch(
      /^2 further links over the cut are not named/,
    )
    expect(whyHidden({ ...cut, crossingLinks: 1, links: [link] }, 'named')).toBeNull()
    expect(whyHidden({ ...cut, crossingLinks: null }, 'sealed')).toBeNull()
  })
})

describe('stretch view in words', () => {
  const node = (name: string, side: 'a' | 'b', state: OverlayNode['state'] = 'heard'): OverlayNode => ({
    name,
    labels: { harbour: 'Tarnwick' },
    side,
    value: -0.42,
    degree: 6,
    weightedDegree: 5.5,
    heardAt: at,
    version: null,
    state,
  })

  it('says what holds the sides, or that nothing is heard across', () => {
    expect(gapText(weak, cut, false)).toEqual({ text: '3 links hold the sides together', grave: false })
    expect(gapText(weak, { ...cut, crossingLinks: 1 }, false).text).toBe('1 link holds the sides together')
    expect(gapText(weak, cut, true)).toEqual({ text: 'nothing heard from beyond', grave: true })
    expect(gapText({ ...weak, level: 'split' }, cut, false).grave).toBe(true)
  })

  it('stands for the drawing in one sentence', () => {
    const nodes = [node('tar-01', 'a'), node('pin-01', 'b', 'unheard'), node('pin-02', 'b')]
    expect(stretchSentence(nodes, true, gapText(weak, cut, false), 'harbour')).toBe(
      'Stretch view: 1 node on side a, 2 nodes on side b, in lanes by harbour; 3 links hold the sides together. 1 of them unheard.',
    )
    expect(stretchSentence(nodes, false, { text: '', grave: false }, null)).toBe(
      'Stretch view: 3 nodes; no sides are drawn. 1 of them unheard.',
    )
  })

  it('says where nodes stand that have no value, and draws no sides of which none is known', () => {
    const sides = cut.sides
    const told = { ...node('tar-01', 'a'), value: null }
    const untold = { ...told, side: null }
    expect(unplacedRemark([node('tar-01', 'a'), untold], sides)).toBeNull()
    expect(unplacedRemark([told, untold], sides)).toMatch(/^no node has a value now/)
    expect(unplacedRemark([untold], null)).toMatch(/^no node has a value now/)
    expect(unplacedRemark([untold], sides)).toMatch(/^the thinnest cut is counted/)
    expect([[told, untold], [untold]].map((nodes) => drawsSides(nodes, sides))).toEqual([true, false])
    expect(drawsSides([told], null)).toBe(false)
  })

  it('reads a node out', () => {
    expect(nodeReadout(node('tar-01', 'a'), true)).toBe(
      'tar-01 · harbour Tarnwick · side a · value −0.42 · 6 links · heard',
    )
    expect(nodeReadout({ ...node('tar-01', 'a'), value: null, degree: null }, false)).toBe(
      'tar-01 · harbour Tarnwick · no value · heard',
    )
  })
})

describe('small words', () => {
  it('expects the first reading by pace', () => {
    expect([
      firstReadingSeconds('calm'),
      firstReadingSeconds('steady'),
      firstReadingSeconds('brisk'),
    ]).toEqual([
      { low: 50, high: 250 },
      { low: 10, high: 50 },
      { low: 5, high: 25 },
    ])
    expect([staleAfterMs('steady'), staleAfterMs('calm')]).toEqual([15_000, 60_000])
  })

  it('makes short names that the server accepts', () => {
    expect(['Harbour Line 2', '  Tide & Berth  ', 'Élévation', '–', 'x'.repeat(60)].map(slugOf)).toEqual([
      'harbour-line-2',
      'tide-berth',
      'elevation',
      '',
      'x'.repeat(40),
    ])
    expect(slugOf(`${'a'.repeat(39)} b`)).toBe('a'.repeat(39))
  })

  it('finds the overlay in a path', () => {
    expect(['/overlays/harbourline/nodes', '/overlays/new', '/team', '/overlays'].map(overlayOfPath)).toEqual(
      ['harbourline', null, null, null],
    )
    expect(overlayPages('harbourline').map((p) => `${p.letter} ${p.href}`)).toEqual([
      'A /overlays/harbourline',
      'B /overlays/harbourline/weak',
      'C /overlays/harbourline/rehearsals',
      'D /overlays/harbourline/reinforcement',
      'E /overlays/harbourline/nodes',
      'F /overlays/harbourline/joining',
      'G /overlays/harbourline/upkeep',
      'H /overlays/harbourline/warnings',
      'I /overlays/harbourline/partners',
    ])
  })

  it('keeps a chosen sheet and forgets it when the system is followed', () => {
    expect(['night', 'day', 'nonsense', undefined].map(parseSheetChoice)).toEqual([
      'night',
      'day',
      'system',
      'system',
    ])
    expect(sheetCookie('night')).toBe('thinspan-sheet=night; path=/; max-age=31536000; samesite=lax')
    expect(sheetCookie('system')).toContain('max-age=0')
  })

  it('writes labels the same way whatever their order', () => {
    expect(labelText({ rack: 'r2', harbour: 'Tarnwick' })).toBe('harbour=Tarnwick; rack=r2')
  })
})
