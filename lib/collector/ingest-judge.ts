import { AppError } from '@/lib/http/app-error'
import type { Arrival } from './ingest-entry'
import { type HeldReport, heldOf, judgeReport } from './report-check'

/**
 * Judges in order of arrival: a report is judged by the one before it in the same batch. Sets every outcome, and keeps
 * `held` at what will be held. @returns those of former starts that came from their agent itself, for a closer look
 */
export function judgeArrivals(arrivals: readonly Arrival[], held: Map<string, HeldReport>): Arrival[] {
  const late: Arrival[] = []
  for (const arrival of arrivals) {
    const { sender, report, relayed } = arrival
    const before = held.get(sender.agentId) ?? null
    const verdict = judgeReport(before, report)
    switch (verdict.kind) {
      case 'new':
        held.set(sender.agentId, heldOf(before, report))
        arrival.outcome = { kind: 'stored' }
        break
      case 'late':
        if (!relayed) late.push(arrival)
        arrival.outcome = { kind: 'repeated' }
        break
      case 'repeated':
        arrival.outcome = { kind: 'repeated' }
        break
      case 'falling': {
        const { colony, counter, from, to } = verdict
        const detail = `In colony ${colony} "${counter}" fell from ${from} to ${to}. Counters only grow within an incarnation and seeding: start the agent anew.`
        const error = new AppError('falling-counters', detail, { members: { colony, counter, from, to } })
        arrival.outcome = { kind: 'refused', error }
      }
    }
  }
  return late
}
