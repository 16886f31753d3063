import { formatCount } from '@/lib/face/format'
import { bow, boxAround, figuresWidth, hang, pathOf } from './geometry'
import { type Occupied, placeTag, TAG_PX } from './labels'
import type { Bundle, Curve, Dot, Point, StretchLink, Taut } from './types'

const MAX_STRANDS = 9

/** Links within the sides, as one path: thousands of elements would hold up the page. */
export function faintPath(links: readonly StretchLink[], dots: ReadonlyMap<string, Dot>): string {
  return links
    .map((link) => {
      const a = dots.get(link.a)
      const b = dots.get(link.b)
      if (!a || !b) return ''
      const [p, q] = a.x <= b.x ? [a, b] : [b, a]
      return pathOf(bow(p, q, Math.min(14, 0.08 * Math.hypot(q.x - p.x, q.y - p.y))))
    })
    .join('')
}

/** Links over the cut: the more of λ₂ one carries, the thicker and straighter it is drawn. */
export function tautLinks(links: readonly StretchLink[], dots: ReadonlyMap<string, Dot>): Taut[] {
  const top = Math.max(...links.map((l) => l.share ?? 0), 1e-9)
  return links.flatMap((link) => {
    const a = dots.get(link.a)
    const b = dots.get(link.b)
    if (!a || !b) return []
    const [p, q] = a.x <= b.x ? [a, b] : [b, a]
    const pull = link.share === null ? 0.5 : link.share / top
    const curve = hang(p, q, 16 * (1 - pull))
    return {
      link,
      curve,
      path: pathOf(curve),
      thickness: 1.25 + 3.5 * Math.sqrt(link.share ?? 0.02),
      lost: link.state === 'lost' || a.unheard || b.unheard,
      tag: null,
    }
  })
}

interface BundleInput {
  /** Links without a name. */
  count: number
  /** Curves of those that have one. */
  named: readonly Curve[]
  silent: boolean
}

/** Where links may not be named: their number, between the sides, and nothing about who holds them. */
export function bundleOf(input: BundleInput, dots: readonly Dot[], occupied: Occupied): Bundle | null {
  const { count, named, silent } = input
  const a = dots.filter((d) => d.side === 'a' && !d.parked)
  const b = dots.filter((d) => d.side === 'b' && !d.parked)
  if (count <= 0 || a.length === 0 || b.length === 0) return null
  const left = { x: Math.max(...a.map((d) => d.x + d.radius)) + 14, ...extent(a) }
  const right = { x: Math.min(...b.map((d) => d.x - d.radius)) - 14, ...extent(b) }
  const from = { x: left.x + 7, y: (left.top + left.bottom) / 2 }
  const to = { x: right.x - 7, y: (right.top + right.bottom) / 2 }
  const strands = Math.min(count, MAX_STRANDS)
  const text = silent
    ? `${count} not heard`
    : `${named.length > 0 ? 'and ' : ''}${formatCount(count, 'link')}${named.length > 0 ? ' more' : ''}`
  const middle = { x: (from.x + to.x) / 2, y: (from.y + to.y) / 2 }
  return {
    count,
    strands: Array.from({ length: strands }, (_, i) => pathOf(hang(from, to, (i - (strands - 1) / 2) * 5))),
    brackets: [bracket(left, from, 1), bracket(right, to, -1)],
    lost: silent,
    tag: placeTag(hang(from, to, 0), text, named, occupied) ?? {
      ...middle,
      text,
      anchor: 'middle',
      box: boxAround(middle, figuresWidth(text, TAG_PX) + 8, TAG_PX + 5),
    },
  }
}

function extent(dots: readonly Dot[]): { top: number; bottom: number } {
  return { top: Math.min(...dots.map((d) => d.y)) - 8, bottom: Math.max(...dots.map((d) => d.y)) + 8 }
}

function bracket(line: { x: number; top: number; bottom: number }, tip: Point, way: 1 | -1): string {
  const back = line.x - 6 * way
  return `M${back} ${line.top}H${line.x}V${line.bottom}H${back}M${line.x} ${tip.y}H${tip.x}`
}
