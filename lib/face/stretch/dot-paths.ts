import type { Dot } from './types'

/** Dots that look alike, as one path. */
export interface DotPath {
  key: string
  side: Dot['side']
  unheard: boolean
  /** Left or revoked. */
  away: boolean
  path: string
}

/** All dots in as few paths as they have looks: thousands of elements would hold up the page whenever one moves. */
export function dotPaths(dots: readonly Dot[]): DotPath[] {
  const paths = new Map<string, DotPath & { pieces: string[] }>()
  for (const dot of dots) {
    const { side, unheard, shape, node } = dot
    const away = node.state === 'left' || node.state === 'revoked'
    const key = `${side} ${shape} ${unheard} ${away}`
    const known = paths.get(key) ?? { key, side, unheard, away, path: '', pieces: [] }
    known.pieces.push(pieceOf(dot))
    paths.set(key, known)
  }
  return [...paths.values()].map(({ pieces, ...path }) => ({ ...path, path: pieces.join('') }))
}

function pieceOf({ x, y, radius, unheard, shape }: Dot): string {
  const r = unheard ? radius - 0.9 : radius
  const [left, top] = [round(x - r), round(y - (shape === 'round' ? 0 : r))]
  const across = round(2 * r)
  if (shape === 'round')
    return `M${left} ${top}a${round(r)} ${round(r)} 0 1 0 ${across} 0a${round(r)} ${round(r)} 0 1 0 ${-across} 0z`
  return `M${left} ${top}h${across}v${across}h${-across}z`
}

function round(value: number): number {
  return Math.round(value * 10) / 10
}
