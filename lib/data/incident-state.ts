import type { Incident } from '@/entities'
import type { Incident as IncidentDto } from './warn-dto'

export function stateOf({
  resolvedAt,
  clearedAt,
  holder,
}: Pick<Incident, 'resolvedAt' | 'clearedAt' | 'holder'>): IncidentDto['state'] {
  if (resolvedAt) return 'resolved'
  if (clearedAt) return 'cleared'
  return holder ? 'held' : 'open'
}

/** Expects overlay, team and holder to be loaded. */
export function toIncident(incident: Incident): IncidentDto {
  const { overlay, team, holder } = incident
  const iso = (at: Date | null | undefined) => at?.toISOString() ?? null
  return {
    id: incident.id,
    number: incident.number,
    overlay: { slug: overlay.slug, name: overlay.name },
    team: { slug: team.slug, name: team.name },
    severity: incident.severity,
    state: stateOf(incident),
    sentence: incident.sentence,
    raisedAt: incident.raisedAt.toISOString(),
    clearedAt: iso(incident.clearedAt),
    resolvedAt: iso(incident.resolvedAt),
    holder: holder ? { id: holder.id, name: holder.name } : null,
    heldSince: iso(incident.heldSince),
    mutedUntil: iso(incident.mutedUntil),
    mutedBecause: incident.mutedBecause ?? null,
    inMaintenance: incident.inMaintenance,
  }
}
