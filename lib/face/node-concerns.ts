import type { OverlayNode } from '@/lib/data/dto'
import { formatCount, formatShare } from './format'

/** Agents judge each other's passes with a minute's tolerance: half of it is worth looking into. */
export const CLOCK_CONCERN_MS = 30_000
/** A report that takes this long comes close to being late at every pace but calm. */
export const REPORT_CONCERN_MS = 2_000
export const LATE_TICKS_CONCERN = 0.2

/** What an operator should look at, gravest first; the state itself stands in a column of its own. */
export function nodeConcerns({ health, leftOutBecause, relayed, state }: OverlayNode): string[] {
  const concerns: string[] = []
  if (state === 'left-out' && leftOutBecause) concerns.push(leftOutBecause)
  if (state === 'left' || state === 'revoked') return concerns
  if (relayed) concerns.push('reports come through neighbours')
  if (!health) return concerns
  if (health.auditImbalance !== null && health.auditImbalance !== 0)
    concerns.push(`audit off by ${formatCount(Math.abs(health.auditImbalance), 'walker')}`)
  if (health.refusedNeighbours > 0)
    concerns.push(`refuses ${formatCount(health.refusedNeighbours, 'neighbour')}`)
  if (health.source?.error) concerns.push('neighbour list cannot be read')
  if (health.upgrade?.state === 'failed') concerns.push(`upgrade to ${health.upgrade.version} failed`)
  if (Math.abs(health.clockSkewMs) >= CLOCK_CONCERN_MS)
    concerns.push(`clock ${clockText(health.clockSkewMs)}`)
  if (health.withoutAgent > 0)
    concerns.push(`${formatCount(health.withoutAgent, 'neighbour')} without an agent`)
  if (health.reportTookMs !== null && health.reportTookMs >= REPORT_CONCERN_MS)
    concerns.push(`reports take ${(health.reportTookMs / 1000).toFixed(1)} s`)
  if (health.ticksLateShare !== null && health.ticksLateShare >= LATE_TICKS_CONCERN)
    concerns.push(`${formatShare(health.ticksLateShare)} of ticks late`)
  return concerns
}

const STATE_RANKS: Record<OverlayNode['state'], number> = {
  unheard: 0,
  'left-out': 1,
  detached: 2,
  heard: 4,
  revoked: 5,
  left: 6,
}

/** Those that need looking at first, those that are gone last; otherwise in the order they come in. */
export function byConcern(nodes: readonly OverlayNode[]): OverlayNode[] {
  const rank = (node: OverlayNode) =>
    node.state === 'heard' && nodeConcerns(node).length > 0 ? 3 : STATE_RANKS[node.state]
  return [...nodes].sort((p, q) => rank(p) - rank(q))
}

/** The collector's clock less the agent's: positive where the agent's is slow. */
export function clockText(skewMs: number): string {
  const size = Math.abs(skewMs)
  if (size < 1) return 'agrees with this server'
  const text = size < 1000 ? `${Math.round(size)} ms` : `${(size / 1000).toFixed(size < 10_000 ? 1 : 0)} s`
  return `${text} ${skewMs > 0 ? 'slow' : 'fast'}`
}
