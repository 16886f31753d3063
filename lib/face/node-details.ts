import type { OverlayNode } from '@/lib/data/dto'
import { formatCount, formatShare, formatValue } from './format'
import { linkKindWords } from './link-kind'
import { clockText } from './node-concerns'
import { formatDuration } from './time'

export interface Detail {
  label: string
  value: string
  /** What it means, or what to do. */
  remark?: string
}

export interface DetailGroup {
  heading: string
  details: Detail[]
}

/** Where neighbours are learnt from, by the agent's names for it. */
const SOURCE_WORDS: Record<string, string> = {
  list: 'a list',
  file: 'a file',
  command: 'a command',
  srv: 'DNS',
  http: 'the node itself',
}

/** All that is known of a node, by subject. Moments are shown beside it, by the page's clock. */
export function nodeDetails(node: OverlayNode): DetailGroup[] {
  const groups = [
    { heading: 'Links', details: linkDetails(node) },
    { heading: 'Reports', details: reportDetails(node) },
    { heading: 'Agent', details: agentDetails(node) },
  ]
  return groups.filter((group) => group.details.length > 0)
}

/** "5 of 6": measured of known. Before version 2 agents say only what they measure. */
export function linksText({ degree, health }: OverlayNode): string | null {
  if (degree === null) return null
  return health ? `${degree} of ${health.linksKnown}` : String(degree)
}

function linkDetails(node: OverlayNode): Detail[] {
  const { health, side, value, weightedDegree } = node
  const details: Detail[] = []
  const links = linksText(node)
  if (links !== null)
    details.push({
      label: 'measured',
      value: links,
      remark: health ? 'of those its node knows' : undefined,
    })
  if (health && health.withoutAgent > 0)
    details.push({
      label: 'without an agent',
      value: formatCount(health.withoutAgent, 'neighbour'),
      remark: 'Their links cannot be measured until an agent runs beside them.',
    })
  if (health && health.weakestWeight !== null && health.meanWeight !== null)
    details.push({
      label: 'delivered in time',
      value: `weakest ${health.weakestWeight.toFixed(2)}, mean ${health.meanWeight.toFixed(2)}`,
      remark: '1 is everything',
    })
  else if (weightedDegree !== null)
    details.push({ label: 'delivered in time', value: `${weightedDegree.toFixed(2)} over all links` })
  if (health && health.refusedNeighbours > 0)
    details.push({
      label: 'refused',
      value: formatCount(health.refusedNeighbours, 'neighbour'),
      remark: 'What they declare does not match what arrives from them.',
    })
  const kind = linkKindWords(health?.linkKind)
  if (kind) details.push({ label: 'what is measured', value: kind.short, remark: kind.sentence })
  if (health?.source)
    details.push({
      label: 'neighbours from',
      value: SOURCE_WORDS[health.source.kind] ?? health.source.kind,
      remark: health.source.error ? `Fails: ${health.source.error} The last good list is in use.` : 'works',
    })
  if (side) details.push({ label: 'side of the cut', value: side })
  if (value !== null) details.push({ label: 'Fiedler value', value: formatValue(value) })
  return details
}

function reportDetails({ health, relayed }: OverlayNode): Detail[] {
  const details: Detail[] = []
  if (relayed !== undefined)
    details.push({
      label: 'come',
      value: relayed ? 'through neighbours' : 'directly',
      remark: relayed ? 'It does not reach this server by itself.' : undefined,
    })
  if (!health) return details
  if (health.reportTookMs !== null)
    details.push({ label: 'the last took', value: `${Math.round(health.reportTookMs)} ms` })
  details.push({ label: 'failed since its start', value: String(health.reportsFailed) })
  if (health.auditImbalance !== null)
    details.push({
      label: 'walker audit',
      value:
        health.auditImbalance === 0 ? 'balances' : `off by ${formatCount(health.auditImbalance, 'walker')}`,
    })
  return details
}

function agentDetails({ health, node, version }: OverlayNode): Detail[] {
  const details: Detail[] = []
  if (version !== null) details.push({ label: 'version', value: version })
  if (health?.upgrade)
    details.push({
      label: `upgrade to ${health.upgrade.version}`,
      value: health.upgrade.state,
      remark: health.upgrade.error ?? undefined,
    })
  if (health) {
    details.push({ label: 'up for', value: formatDuration(health.uptimeSeconds) })
    details.push({ label: 'clock', value: clockText(health.clockSkewMs) })
    if (health.ticksLateShare !== null)
      details.push({ label: 'ticks that come late', value: formatShare(health.ticksLateShare) })
  }
  if (node) details.push({ label: 'the overlay knows it as', value: node })
  if (health) details.push({ label: 'last error', value: health.lastError ?? 'none' })
  return details
}
