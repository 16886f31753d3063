import fc from 'fast-check'
import { describe, expect, it } from 'vitest'
import { type Box, laneKeys, layoutStretch, type StretchNode } from '@/lib/face/stretch'
import { lcg, stretchInputs } from './stretch-input'

const apart = (p: Box, q: Box) =>
  p.right <= q.left || q.right <= p.left || p.bottom <= q.top || q.bottom <= p.top

describe('stretch layout', () => {
  it('never lets two dots overlap or leave the drawing, for 2 to 200 nodes', () => {
    fc.assert(
      fc.property(stretchInputs(), (input) => {
        const { dots, height } = layoutStretch(input)
        expect(dots.length).toBe(input.nodes.length)
        const out = dots.filter(
          (d) => d.x < d.radius || d.x > input.width - d.radius || d.y < d.radius || d.y > height - d.radius,
        )
        const touching = dots.flatMap((p, i) =>
          dots
            .slice(i + 1)
            .filter((q) => Math.max(Math.abs(p.x - q.x), Math.abs(p.y - q.y)) < p.radius + q.radius)
            .map((q) => `${p.node.name} ${q.node.name}`),
        )
        expect({ out, touching }).toEqual({ out: [], touching: [] })
      }),
      { numRuns: 60 },
    )
  })

  it('keeps tags and names clear of each other and of every dot', () => {
    fc.assert(
      fc.property(stretchInputs(80), (input) => {
        const { dots, taut, names, bundle } = layoutStretch(input)
        const boxes = [...taut.flatMap((t) => (t.tag ? [t.tag.box] : [])), ...names.map((n) => n.box)]
        if (bundle) boxes.push(bundle.tag.box)
        for (const [i, box] of boxes.entries()) {
          for (const other of boxes.slice(i + 1)) expect(apart(box, other)).toBe(true)
        }
        const labels = bundle ? boxes.slice(0, -1) : boxes
        for (const box of labels) {
          for (const d of dots) {
            const dot = {
              left: d.x - d.radius,
              right: d.x + d.radius,
              top: d.y - d.radius,
              bottom: d.y + d.radius,
            }
            expect(apart(box, dot)).toBe(true)
          }
        }
      }),
      { numRuns: 60 },
    )
  })

  it('draws the same picture whatever the order of nodes and links', () => {
    fc.assert(
      fc.property(stretchInputs(60), (input) => {
        const turned = { ...input, nodes: [...input.nodes].reverse() }
        const places = (i: typeof input) =>
          new Map(layoutStretch(i).dots.map((d) => [d.node.name, [d.x, d.y]] as const))
        expect(places(turned)).toEqual(places(input))
      }),
      { numRuns: 30 },
    )
  })

  it('keeps side a left of side b with a clear gap between them', () => {
    fc.assert(
      fc.property(stretchInputs(), (input) => {
        fc.pre(input.sided)
        const dots = layoutStretch(input).dots.filter((d) => !d.parked)
        const a = dots.filter((d) => d.side === 'a').map((d) => d.x)
        const b = dots.filter((d) => d.side === 'b').map((d) => d.x)
        fc.pre(a.length > 0 && b.length > 0)
        expect(Math.min(...b) - Math.max(...a)).toBeGreaterThan(0.05 * (input.width - 200))
      }),
      { numRuns: 60 },
    )
  })

  it('turns a drawing round when the vector comes with the other sign', () => {
    const nodes = harbourline()
    const flipped = nodes.map((n) => ({ ...n, value: -(n.value ?? 0) }))
    const at = (of: StretchNode[]) =>
      layoutStretch({ ...base, nodes: of }).dots.map((d) => [d.node.name, Math.round(d.x)])
    expect(at(flipped)).toEqual(at(nodes))
  })

  it('draws one counted bundle for links that may not be named, and none when all are named', () => {
    const hidden = layoutStretch({ ...base, crossingLinks: 3 })
    expect(hidden.bundle).toMatchObject({ count: 3, tag: { text: '3 links' }, lost: false })
    expect(hidden.taut).toEqual([])
    const named = layoutStretch({ ...base, links: [crossing(0.6)], crossingLinks: 1 })
    expect(named.bundle).toBeNull()
    expect(named.taut).toHaveLength(1)
    const some = layoutStretch({ ...base, links: [crossing(0.6)], crossingLinks: 4 })
    expect(some.bundle).toMatchObject({ count: 3, tag: { text: 'and 3 links more' } })
  })

  it('draws a link thicker and tauter the more of λ₂ it carries', () => {
    const light = { ...crossing(0.1), a: 'tar-02', b: 'pin-02' }
    const { taut } = layoutStretch({ ...base, links: [crossing(0.6), light], crossingLinks: 2 })
    const [heavy, weak] = taut
    expect(heavy?.thickness).toBeGreaterThan(weak?.thickness ?? 9)
    const sag = (t: typeof heavy) => (t ? t.curve.bend.y - (t.curve.from.y + t.curve.to.y) / 2 : Number.NaN)
    expect(sag(heavy)).toBe(0)
    expect(sag(weak)).toBeGreaterThan(5)
    expect(heavy?.tag?.text).toBe('60\u202f%')
  })

  it('parks nodes that have no value in a column of their own', () => {
    const nodes = harbourline().map((n, i) => (i < 3 ? { ...n, value: null } : n))
    const layout = layoutStretch({ ...base, nodes })
    const parked = layout.dots.filter((d) => d.parked)
    expect(parked).toHaveLength(3)
    for (const d of parked) expect(d.x).toBeGreaterThan(layout.parking?.left ?? 9999)
    for (const d of layout.dots.filter((o) => !o.parked)) expect(d.x).toBeLessThan(layout.parking?.left ?? 0)
  })

  it('spreads nodes by name while no value is known, without a parking column', () => {
    const nodes = harbourline().map((n) => ({ ...n, value: null, side: null }))
    const layout = layoutStretch({ ...base, nodes, sided: false })
    expect(layout.parking).toBeNull()
    expect(layout.dots.every((d) => d.parked)).toBe(true)
  })

  it('shows no sides where none stand out, whatever the nodes say', () => {
    const layout = layoutStretch({ ...base, sided: false, links: [crossing(0.5)], crossingLinks: 9 })
    expect(layout.dots.every((d) => d.side === null && d.shape === 'round')).toBe(true)
    expect(layout.taut).toEqual([])
    expect(layout.bundle).toBeNull()
  })

  it('lays out 2,000 nodes in 20 lanes within a second, gathering the smallest lanes', () => {
    const random = lcg(7)
    const nodes = Array.from({ length: 2000 }, (_, i) => ({
      name: `n-${i}`,
      labels: { room: `room ${Math.floor(random() * 20)}` },
      side: null,
      value: random() * 4 - 2,
      state: 'heard' as const,
      degree: 5,
    }))
    // The best of several: others run beside.
    let layout = layoutStretch(base)
    const tookMs = Array.from({ length: 5 }, () => {
      const before = performance.now()
      layout = layoutStretch({ ...base, nodes, laneKey: 'room', sided: false })
      return performance.now() - before
    })
    expect(Math.min(...tookMs)).toBeLessThan(1000)
    expect(layout.lanes).toHaveLength(12)
    expect(layout.lanes.at(-1)?.label).toBe('others')
    expect(layout.height).toBeLessThan(2400)
  })

  it('offers the label the cut follows first, then labels with few values', () => {
    const nodes = harbourline().map((n, i) => ({ ...n, labels: { ...n.labels, serial: `s${i}`, os: 'x' } }))
    expect(laneKeys(nodes)).toEqual(['harbour', 'os', 'serial'])
    expect(laneKeys(nodes, 'serial')[0]).toBe('serial')
  })
})

const base = {
  nodes: harbourline(),
  links: [],
  laneKey: 'harbour',
  sided: true,
  crossingLinks: 0,
  silent: false,
  width: 1000,
}

function crossing(share: number) {
  return { a: 'tar-01', b: 'pin-01', weight: 1, share, crossing: true, state: 'live' as const }
}

function harbourline(): StretchNode[] {
  const offices = [
    ['tar', 'Tarnwick', 'a'],
    ['gul', 'Gullhythe', 'a'],
    ['pin', 'Pinnet Bay', 'b'],
    ['eel', 'Eelholm', 'b'],
  ] as const
  return offices.flatMap(([code, harbour, side]) =>
    Array.from({ length: 9 }, (_, i) => ({
      name: `${code}-0${i + 1}`,
      labels: { harbour },
      side,
      value: (side === 'a' ? -1 : 1) * (1 - i * 0.05),
      state: 'heard' as const,
      degree: 6,
    })),
  )
}
