import { DEFAULT_RULES } from '@/lib/warn/default-rules'
import type { WarnFacts } from '@/lib/warn/facts'
import { replay } from '@/lib/warn/replay'

export interface BenchIncident {
  raisedAtMs: number
  clearedAtMs: number
  /** The rule that raised it; all that joined. */
  rules: string[]
}

/** Of all default rules over a series, those that overlap as one. */
export function incidentsOf(series: readonly WarnFacts[]): BenchIncident[] {
  const spans = DEFAULT_RULES.flatMap((rule) => {
    const { settings } = rule
    const name = settings.kind === 'falling' ? `falling by ${settings.means}` : settings.kind
    return replay(rule, series).map(({ raisedAtMs, clearedAtMs }) => ({
      raisedAtMs,
      clearedAtMs: clearedAtMs ?? Number.POSITIVE_INFINITY,
      rules: [name],
    }))
  }).sort((a, b) => a.raisedAtMs - b.raisedAtMs)
  const incidents: BenchIncident[] = []
  for (const span of spans) {
    const last = incidents[incidents.length - 1]
    if (!last || span.raisedAtMs > last.clearedAtMs) incidents.push(span)
    else {
      last.clearedAtMs = Math.max(last.clearedAtMs, span.clearedAtMs)
      last.rules.push(...span.rules)
    }
  }
  return incidents
}
