import { IncidentEntrySchema, IncidentSchema } from '@/entities'
import { query } from '@/lib/collector/query'
import type { Call } from '@/lib/http/call'
import { toIncident } from './incident-state'
import { entryText } from './incidents'
import { sightAs } from './sight'
import type { Mention } from './weak-dto'

export const MENTIONS_MOST = 20
const LINES_MOST = 5

/**
 * A team's incidents of an overlay whose timeline names a node or a link; the newest first.
 * @param spellings any of these, as a whole word; by the nodes' own names
 */
export async function mentionsOf(
  { em }: Call,
  { overlayId, teamId }: { overlayId: string; teamId: string },
  spellings: readonly string[],
): Promise<Mention[]> {
  const found = await query<{ id: string }>(
    em,
    `select i.id from incidents i where i.overlay_id = ?
       and i.team_id = ?
       and exists (select from incident_entries e, jsonb_array_elements_text(?::jsonb) spelling
         where e.incident_id = i.id and position(spelling in e.text) > 0)
     order by i.number desc limit ?`,
    [overlayId, teamId, JSON.stringify(spellings), MENTIONS_MOST],
  )
  if (found.length === 0) return []
  const ids = found.map(({ id }) => id)
  const incidents = await em.find(
    IncidentSchema,
    { id: { $in: ids } },
    { populate: ['overlay', 'team', 'holder'], orderBy: { number: 'desc' } },
  )
  const entries = await em.find(
    IncidentEntrySchema,
    { incident: { $in: ids } },
    { orderBy: { at: 'desc', id: 'desc' } },
  )
  const sight = await sightAs(em, overlayId, [teamId])
  return incidents.flatMap((incident) => {
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
