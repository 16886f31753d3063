/** Where the points of a small curve go: a break where one is null. */
export interface CurveBox {
  width: number
  height: number
  pad: number
  fromMs: number
  toMs: number
  /** Of the scale, which begins at `least`. */
  least: number
  most: number
}

export type CurvePoint = readonly [atMs: number, value: number | null]

export function curvePath(points: readonly CurvePoint[], box: CurveBox): string {
  let pen = 'M'
  let path = ''
  for (const [atMs, value] of points) {
    if (value === null) {
      pen = 'M'
      continue
    }
    path += `${pen}${round(xOf(atMs, box))} ${round(yOf(value, box))}`
    pen = 'L'
  }
  return path
}

export function xOf(atMs: number, { width, pad, fromMs, toMs }: CurveBox): number {
  const share = toMs > fromMs ? (atMs - fromMs) / (toMs - fromMs) : 1
  return pad + (width - 2 * pad) * Math.min(1, Math.max(0, share))
}

export function yOf(value: number, { height, pad, least, most }: CurveBox): number {
  const share = most > least ? (value - least) / (most - least) : 0.5
  return height - pad - (height - 2 * pad) * Math.min(1, Math.max(0, share))
}

const round = (value: number): number => Math.round(value * 10) / 10

/** Between points further apart than this nothing was kept: the curve breaks. */
export function withBreaks(points: readonly CurvePoint[], longestMs: number): CurvePoint[] {
  return points.flatMap((point, index): CurvePoint[] => {
    const before = points[index - 1]
    return before && point[0] - before[0] > longestMs ? [[before[0] + 1, null], point] : [point]
  })
}
