import { describe, expect, it } from 'vitest'
import type { OverlayLink } from '@/lib/data/dto'
import { type ExportedNode, escapeXml, graphMl, linksCsv, nodesCsv } from '@/lib/export'
import { drawingFile, familiesOf, styleAttributes } from '@/lib/face/drawing-file'

const node = (name: string, over: Partial<ExportedNode> = {}): ExportedNode => ({
  ...{ name, labels: {}, side: null, value: null, degree: 2, weightedDegree: 1.5, state: 'heard' },
  ...{ heardAt: '2026-12-02T10:00:00.000Z', version: '0.1.0', ...over },
})
const link = (a: string, b: string, over: Partial<OverlayLink> = {}): OverlayLink => ({
  ...{ a, b, weight: 0.5, share: null, crossing: false, state: 'live', heardAt: '2026-12-02T10:00:00.000Z' },
  ...over,
})

describe('GraphML', () => {
  const text = graphMl({
    name: 'tides',
    at: '2026-12-02T10:00:00.000Z',
    nodes: [
      node('tar-01', { labels: { office: 'Tarnwick & Sons' }, side: 'a', value: -1.25 }),
      node('<eel "09">', { labels: { 'rack\n': 'r2' } }),
    ],
    links: [link('<eel "09">', 'tar-01', { share: 0.4, crossing: true }), link('gone', 'tar-01')],
  })

  it('declares each key once, before the graph, and uses no other', () => {
    const declared = [...text.matchAll(/<key id="(\w+)"/g)].map(([, id]) => id)
    const used = new Set([...text.matchAll(/<data key="(\w+)"/g)].map(([, id]) => id))
    expect(new Set(declared).size).toBe(declared.length)
    expect([...used].filter((id) => !declared.includes(id))).toEqual([])
    expect(text.lastIndexOf('<key')).toBeLessThan(text.indexOf('<graph '))
    expect(text).toContain('attr.name="label.office" attr.type="string"')
    expect(text).toContain('attr.name="label.rack&#10;"')
  })

  it('escapes what names hold, and leaves out what is not known and links without an end', () => {
    expect(text).toContain('<data key="d0">&lt;eel &quot;09&quot;&gt;</data>')
    expect(text).toContain('Tarnwick &amp; Sons')
    expect(text.match(/<edge /g)).toHaveLength(1)
    expect(text).toContain('<edge source="n1" target="n0"><data key="e0">0.5</data><data key="e1">0.4</data>')
    expect(text.match(/<node /g)).toHaveLength(2)
    expect(text).not.toContain('null')
  })

  it('holds nothing that XML cannot', () => {
    expect(escapeXml('a\u0000b\uFFFFc\uD800d😀')).toBe('a\uFFFDb\uFFFDc\uFFFDd😀')
  })
})

describe('tables', () => {
  it('have a column for each label, and no formula is run', () => {
    expect(nodesCsv([node('=tar', { labels: { office: 'T' } }), node('eel-09')])).toBe(
      'name,state,side,value,degree,weightedDegree,version,heardAt,label.office\r\n' +
        '"\'=tar",heard,,,2,1.5,0.1.0,2026-12-02T10:00:00.000Z,T\r\n' +
        'eel-09,heard,,,2,1.5,0.1.0,2026-12-02T10:00:00.000Z,\r\n',
    )
  })

  it('say of each link whether it crosses', () => {
    expect(linksCsv([link('a', 'b', { crossing: true, share: 0.25 })])).toBe(
      'source,target,weight,share,crossing,state,heardAt\r\na,b,0.5,0.25,yes,live,2026-12-02T10:00:00.000Z\r\n',
    )
  })
})

describe('the drawing as a file', () => {
  it('has its layers over the sheet, a title and whose it is', () => {
    const { svg, width, height } = drawingFile({
      ...{ width: 100, height: 50, layers: ['<circle r="1"/>', '<path d="M0 0"/>'] },
      ...{ background: '#fbf8f0', ink: '#1a2130', fonts: '@font-face { font-family: "a" }' },
      ...{ title: 'tides & more', caption: 'tides' },
    })
    expect(svg).toMatch(/^<svg xmlns="http:\/\/www.w3.org\/2000\/svg" width="132" height="108"/)
    expect([width, height]).toEqual([132, 108])
    expect(svg).toContain('<title>tides &amp; more</title>')
    expect(svg.indexOf('<circle')).toBeLessThan(svg.indexOf('<path'))
  })

  it('says what differs from what is unset, and of fonts only for text', () => {
    const styles: Record<string, string> = { fill: 'rgb(1, 2, 3)', stroke: 'none', 'font-size': '12px' }
    const of = (isText: boolean) => styleAttributes(isText, (name) => styles[name] ?? '')
    expect(of(false)).toEqual([['fill', 'rgb(1, 2, 3)']])
    expect(of(true)).toEqual([
      ['fill', 'rgb(1, 2, 3)'],
      ['font-size', '12px'],
    ])
    expect(familiesOf('"text latin", sans-serif')).toEqual(['text latin', 'sans-serif'])
  })
})
