import type { WatchFacts } from './facts'

/** Text of OpenMetrics 1.0 (Internet-Draft draft-richih-opsawg-openmetrics-00). */
export const METRICS_MEDIA_TYPE = 'application/openmetrics-text; version=1.0.0; charset=utf-8'

interface Family {
  name: string
  type: 'gauge' | 'counter' | 'info'
  /** Must be the end of the name. */
  unit?: 'seconds' | 'bytes'
  help: string
  /** Null values are left out. */
  samples: { labels?: Record<string, string>; value: number | null }[]
}

/** Nothing in it names a neighbour: whoever may scrape it may not know who is linked to whom. */
export function metricsText(facts: WatchFacts, healthy: boolean): string {
  return `${familiesOf(facts, healthy).map(familyText).join('')}# EOF\n`
}

function familiesOf(facts: WatchFacts, healthy: boolean): Family[] {
  const { status, version, uptimeSeconds, withoutAgent, residentBytes } = facts
  const { reports, ticks, links } = status
  const up = links.filter((link) => link.up).length
  const one = (value: number | null) => [{ value }]
  const seconds = (ms: number | null) => one(ms === null ? null : ms / 1000)
  const bit = (is: boolean) => one(is ? 1 : 0)
  const gauge = (name: string, help: string, samples: Family['samples'], unit?: Family['unit']): Family => ({
    name: `thinspan_agent_${name}`,
    type: 'gauge',
    help,
    samples,
    unit,
  })
  const counter = (name: string, help: string, samples: Family['samples']): Family => ({
    name: `thinspan_agent_${name}`,
    type: 'counter',
    help,
    samples,
  })
  return [
    {
      name: 'thinspan_agent',
      type: 'info',
      help: 'The program.',
      samples: [{ labels: { version }, value: 1 }],
    },
    gauge('healthy', 'Whether /health says that all is well.', bit(healthy)),
    gauge('uptime_seconds', 'Since the program began.', one(uptimeSeconds), 'seconds'),
    gauge('resident_memory_bytes', 'Memory held.', one(residentBytes), 'bytes'),
    gauge('links', 'Neighbours, by whether a link to them is up.', [
      { labels: { state: 'up' }, value: up },
      { labels: { state: 'down' }, value: links.length - up },
    ]),
    gauge('neighbours_without_agent', 'Neighbours whose agent is not known.', one(withoutAgent)),
    gauge(
      'source_failing',
      'Whether the list of neighbours cannot be read.',
      bit(Boolean(status.source?.error)),
    ),
    gauge(
      'orders_fresh',
      'Whether orders are in force; without them nothing is measured.',
      bit(!status.frozen),
    ),
    gauge('clock_skew_seconds', 'Collector clock less own.', seconds(status.clockSkewMs), 'seconds'),
    gauge(
      'report_age_seconds',
      'Since the last report that was delivered.',
      seconds(reports.lastDeliveredMsAgo),
      'seconds',
    ),
    gauge(
      'report_took_seconds',
      'There and back, of the last report.',
      seconds(reports.lastTookMs),
      'seconds',
    ),
    gauge(
      'collector_distance',
      'Links to the collector by way of neighbours, 0 for none.',
      one(status.distance),
    ),
    counter('reports', 'Reports, by what became of them.', [
      { labels: { outcome: 'delivered' }, value: reports.delivered },
      { labels: { outcome: 'relayed' }, value: reports.relayed },
      { labels: { outcome: 'failed' }, value: reports.failed },
    ]),
    counter('ticks', 'Ticks of the walkers.', one(ticks.count)),
    counter('ticks_late', 'Ticks that came more than a tick late.', one(ticks.late)),
  ]
}

function familyText({ name, type, unit, help, samples }: Family): string {
  const suffix = type === 'counter' ? '_total' : type === 'info' ? '_info' : ''
  const lines = [`# TYPE ${name} ${type}`]
  if (unit) lines.push(`# UNIT ${name} ${unit}`)
  lines.push(`# HELP ${name} ${escaped(help)}`)
  for (const { labels, value } of samples) {
    if (value !== null) lines.push(`${name}${suffix}${labelText(labels)} ${value}`)
  }
  return `${lines.join('\n')}\n`
}

function labelText(labels: Record<string, string> = {}): string {
  const pairs = Object.entries(labels).map(([name, value]) => `${name}="${escaped(value)}"`)
  return pairs.length === 0 ? '' : `{${pairs.join(',')}}`
}

const escaped = (text: string): string =>
  text.replaceAll('\\', '\\\\').replaceAll('"', '\\"').replaceAll('\n', '\\n')
