import type { Dot } from './types'

/** Beyond its own size a dot is still pointed at from this far. */
const REACH_PX = 3

/** Finds the dot under a point among thousands: dots by squares of the plane, each a little larger than they are. */
export function dotFinder(dots: readonly Dot[]): (x: number, y: number) => Dot | null {
  const reach = Math.max(1, ...dots.map(({ radius }) => radius)) + REACH_PX
  const squares = new Map<string, Dot[]>()
  const key = (x: number, y: number) => `${Math.floor(x / reach)} ${Math.floor(y / reach)}`
  for (const dot of dots) {
    const held = squares.get(key(dot.x, dot.y))
    if (held) held.push(dot)
    else squares.set(key(dot.x, dot.y), [dot])
  }
  return (x, y) => {
    let best: Dot | null = null
    let least = reach
    for (let dx = -1; dx <= 1; dx++)
      for (let dy = -1; dy <= 1; dy++)
        for (const dot of squares.get(key(x + dx * reach, y + dy * reach)) ?? []) {
          const distance = Math.hypot(dot.x - x, dot.y - y)
          if (distance > least) continue
          best = dot
          least = distance
        }
    return best
  }
}
