import { halfOf } from '../node'
import type { Random } from '../random'

const MOST_SALTS = 400

export interface Placing {
  salt: number
  /** Walkers each agent of the X (Y) half places. */
  placeX: number
  placeY: number
}

/** Tries salts until both halves have as many agents, and says how many walkers each agent then places. */
export function choosePlacing(
  colony: number,
  agentIds: readonly string[],
  walkersPerType: number,
  random: Random,
): Placing {
  let best: Placing | null = null
  let bestGap = Number.POSITIVE_INFINITY
  for (let attempt = 0; attempt < MOST_SALTS; attempt++) {
    const salt = random.uint32()
    const onX = agentIds.reduce((count, id) => count + (halfOf(salt, colony, id) === 0 ? 1 : 0), 0)
    const onY = agentIds.length - onX
    const gap = Math.abs(onX - onY)
    if (gap >= bestGap || onX === 0 || onY === 0) continue
    bestGap = gap
    best = { salt, placeX: Math.round(walkersPerType / onX), placeY: Math.round(walkersPerType / onY) }
    if (gap <= agentIds.length % 2) break
  }
  if (!best) throw new RangeError('walkers can only be placed on two agents or more')
  return best
}
