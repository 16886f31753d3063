import { IncidentEntrySchema, IncidentSchema } from '@/entities'
import { query } from '@/lib/collector/query'
import type { Call } from '@/lib/http/call'
import { toIncident } from './incident-state'
import { entryText } from './incidents'
import { type Sight, sightAs } from './sight'
import { callerTeams } from './teams'
import type { Mention } from './weak-dto'

export const MENTIONS_MOST = 20
const LINES_MOST = 5

/**
 * Incidents of an overlay whose timeline names a node or a link, as far as the caller may see them; the newest first.
 * @param spellings any of these, as a whole word; by the nodes' own names
 */
export async function mentionsOf(
  call: Call,
  overlayId: string,
  spellings: readonly string[],
): Promise<Mention[]> {
  const teams = callerTeams(call).map(({ teamId }) => teamId)
  if (teams.length === 0) return []
  const found = await query<{ id: string }>(
    call.em,
    `select i.id from incidents i where i.overlay_id = ?
       and i.team_id in (select jsonb_array_elements_text(?::jsonb)::uuid)
       and exists (select from incident_entries e, jsonb_array_elements_text(?::jsonb) spelling
         where e.incident_id = i.id and position(spelling in e.text) > 0)
     order by i.number desc limit ?`,
    [overlayId, JSON.stringify(teams), JSON.stringify(spellings), MENTIONS_MOST],
  )
  if (found.length === 0) return []
  const ids = found.map(({ id }) => id)
  const incidents = await call.em.find(
    IncidentSchema,
    { id: { $in: ids } },
    { populate: ['overlay', 'team', 'holder'], orderBy: { number: 'desc' } },
  )
  const entries = await call.em.find(
    IncidentEntrySchema,
    { incident: { $in: ids } },
    { orderBy: { at: 'desc', id: 'desc' } },
  )
  const sights = new Map<string, Sight>()
  for (const { team } of incidents)
    if (!sights.has(team.id)) sights.set(team.id, await sightAs(call.em, overlayId, [team.id]))
  return incidents.flatMap((incident) => {
    const sight = sights.get(incident.team.id)
    if (!sight) return []
    const lines = entries.filter((entry) => entry.incident.id === incident.id && names(entry.text, spellings))
    if (lines.length === 0) return []
    return {
      ...toIncident(incident),
      lines: lines
        .slice(0, LINES_MOST)
        .map((entry) => ({ at: entry.at.toISOString(), text: entryText(entry, sight) })),
    }
  })
}

/** Whether a text names one of them, and not only a longer name that holds it: tar-1 is not in tar-10. */
export function names(text: string, spellings: readonly string[]): boolean {
  return spellings.some((spelling) => {
    for (let at = text.indexOf(spelling); at >= 0; at = text.indexOf(spelling, at + 1))
      if (!isOfAName(text, at - 1, -1) && !isOfAName(text, at + spelling.length, 1)) return true
    return false
  })
}

/** A dot or colon belongs to a name only where the name goes on behind it. */
function isOfAName(text: string, at: number, step: 1 | -1): boolean {
  const letter = text.charAt(at)
  if (/[\p{L}\p{N}_-]/u.test(letter)) return true
  return /[.:]/.test(letter) && /[\p{L}\p{N}]/u.test(text.charAt(at + step))
}
