import { formatShare } from '@/lib/face/format'
import { boxAround, contains, figuresWidth, overlaps, pointOn, textWidth } from './geometry'
import type { Box, Curve, Dot, Point, Taut, Text } from './types'

export const TAG_PX = 13
export const NAME_PX = 12
/** Tags beyond this many say little; the table has them all. */
const MAX_TAGS = 10
/** Places along a link, the middle first. */
const PLACES = [0.5, 0.44, 0.56, 0.38, 0.62, 0.32, 0.68, 0.26, 0.74, 0.2, 0.8, 0.15, 0.85]

/** What labels must keep clear of; grows as labels are set. */
export class Occupied {
  private readonly boxes: Box[]

  constructor(dots: readonly Dot[], bounds: Box, more: readonly Box[] = []) {
    this.bounds = bounds
    this.boxes = [...dots.map((d) => boxAround(d, 2 * d.radius + 2, 2 * d.radius + 2)), ...more]
  }

  private readonly bounds: Box

  free(box: Box): boolean {
    const inside =
      box.left >= this.bounds.left &&
      box.right <= this.bounds.right &&
      box.top >= this.bounds.top &&
      box.bottom <= this.bounds.bottom
    return inside && !this.boxes.some((b) => overlaps(b, box))
  }

  take(box: Box): void {
    this.boxes.push(box)
  }
}

/** Gives the weightiest links their share, each where it covers nothing and crosses as few others as can be. */
export function tagLinks(taut: readonly Taut[], occupied: Occupied): Taut[] {
  const order = taut
    .map((t, i) => ({ t, i }))
    .filter(({ t }) => !t.lost && t.link.share !== null)
    .sort((p, q) => (q.t.link.share ?? 0) - (p.t.link.share ?? 0) || p.i - q.i)
    .slice(0, MAX_TAGS)
  const tagged = [...taut]
  for (const { t, i } of order) {
    const others = taut.filter((o) => o !== t).map((o) => o.curve)
    tagged[i] = { ...t, tag: placeTag(t.curve, formatShare(t.link.share ?? 0), others, occupied) }
  }
  return tagged
}

export function placeTag(
  curve: Curve,
  text: string,
  others: readonly Curve[],
  occupied: Occupied,
): Text | null {
  const width = figuresWidth(text, TAG_PX) + 8
  let best: { text: Text; cost: number } | null = null
  for (const [i, t] of PLACES.entries()) {
    const at = pointOn(curve, t)
    const box = boxAround(at, width, TAG_PX + 5)
    if (!occupied.free(box)) continue
    const cost = 10 * others.filter((o) => crosses(o, box)).length + i
    if (!best || cost < best.cost) best = { cost, text: { ...at, text, anchor: 'middle', box } }
  }
  if (best) occupied.take(best.text.box)
  return best?.text ?? null
}

function crosses(curve: Curve, box: Box): boolean {
  // Steps finer than the smallest label is high.
  const steps = Math.ceil(Math.hypot(curve.to.x - curve.from.x, curve.to.y - curve.from.y) / 4) + 1
  for (let k = 0; k <= steps; k++) if (contains(box, pointOn(curve, k / steps))) return true
  return false
}

/** Names beside dots, on whichever side there is room; those without room go unnamed. */
export function nameDots(dots: readonly Dot[], occupied: Occupied, lines: readonly Curve[]): Text[] {
  const names: Text[] = []
  for (const dot of dots) {
    const options = namePlaces(dot).filter((o) => occupied.free(o.box))
    const chosen = options.find((o) => !lines.some((l) => crosses(l, o.box))) ?? null
    if (!chosen) continue
    occupied.take(chosen.box)
    names.push(chosen)
  }
  return names
}

function namePlaces(dot: Dot): Text[] {
  const text = dot.node.name
  const width = textWidth(text, NAME_PX)
  const height = NAME_PX + 3
  const away = dot.radius + 5
  const make = (at: Point, anchor: Text['anchor'], centreX: number): Text => ({
    ...at,
    text,
    anchor,
    box: boxAround({ x: centreX, y: at.y }, width, height),
  })
  const above = { x: dot.x, y: dot.y - dot.radius - height / 2 - 1 }
  const below = { x: dot.x, y: dot.y + dot.radius + height / 2 + 1 }
  const right = make({ x: dot.x + away, y: dot.y }, 'start', dot.x + away + width / 2)
  const left = make({ x: dot.x - away, y: dot.y }, 'end', dot.x - away - width / 2)
  const outward = dot.side === 'b' ? [right, left] : [left, right]
  return [make(above, 'middle', dot.x), make(below, 'middle', dot.x), ...outward]
}
