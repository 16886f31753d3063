import type { Box, Curve, Point } from './types'

export function pathOf(curve: Curve): string {
  const { from, bend, to } = curve
  return `M${r(from.x)} ${r(from.y)}Q${r(bend.x)} ${r(bend.y)} ${r(to.x)} ${r(to.y)}`
}

function r(value: number): number {
  return Math.round(value * 10) / 10
}

export function pointOn(curve: Curve, t: number): Point {
  const u = 1 - t
  return {
    x: u * u * curve.from.x + 2 * u * t * curve.bend.x + t * t * curve.to.x,
    y: u * u * curve.from.y + 2 * u * t * curve.bend.y + t * t * curve.to.y,
  }
}

/** A curve that hangs through by `sag` pixels at its middle. */
export function hang(from: Point, to: Point, sag: number): Curve {
  return { from, to, bend: { x: (from.x + to.x) / 2, y: (from.y + to.y) / 2 + 2 * sag } }
}

/** A curve that leaves the straight line by `bow` pixels to its right. */
export function bow(from: Point, to: Point, by: number): Curve {
  const dx = to.x - from.x
  const dy = to.y - from.y
  const length = Math.hypot(dx, dy) || 1
  return {
    from,
    to,
    bend: {
      x: (from.x + to.x) / 2 - (2 * by * dy) / length,
      y: (from.y + to.y) / 2 + (2 * by * dx) / length,
    },
  }
}

export function boxAround(centre: Point, width: number, height: number): Box {
  return {
    left: centre.x - width / 2,
    right: centre.x + width / 2,
    top: centre.y - height / 2,
    bottom: centre.y + height / 2,
  }
}

export function overlaps(p: Box, q: Box): boolean {
  return p.left < q.right && q.left < p.right && p.top < q.bottom && q.top < p.bottom
}

export function contains(box: Box, point: Point): boolean {
  return point.x >= box.left && point.x <= box.right && point.y >= box.top && point.y <= box.bottom
}

/** Width of text in the figures' family: every glyph has the same advance, 0.62 em. */
export function figuresWidth(text: string, fontPx: number): number {
  return text.length * fontPx * 0.62
}

/** Room for text in the text family: a generous mean advance, since the real one is known to the browser only. */
export function textWidth(text: string, fontPx: number): number {
  return text.length * fontPx * 0.6
}
