import type { WarningRule } from '@/entities'
import { query } from '@/lib/collector/query'
import type { Call } from '@/lib/http/call'
import { enterEntry } from '@/lib/warn/incident-store'
import { ruleSentence } from '@/lib/warn/rule-sentence'
import type { Opened } from './overlays'

/**
 * Takes a rule out of the incident it is raised in; where it was the last one, nothing in it is raised any more. By
 * hand, so nobody is told: the timeline says it.
 */
export async function leaveIncident(
  { em, caller, now }: Call,
  {
    rule,
    overlay,
    teamId,
    because,
  }: Pick<Opened, 'overlay' | 'teamId'> & { rule: WarningRule; because: string },
): Promise<void> {
  const left = await query<{ id: string; isOver: boolean }>(
    em,
    `update incidents set rules = array_remove(rules, ?::uuid),
       cleared_at = case when cardinality(array_remove(rules, ?::uuid)) = 0 then ?::timestamptz else cleared_at end
     where overlay_id = ? and team_id = ? and resolved_at is null and ?::uuid = any(rules)
     returning id, cleared_at is not null as "isOver"`,
    [rule.id, rule.id, now, overlay.id, teamId, rule.id],
  )
  for (const { id, isOver } of left)
    await enterEntry(em, {
      incidentId: id,
      at: now,
      kind: isOver ? 'cleared-all' : 'cleared',
      text: `The rule “${ruleSentence(rule.settings)}” ${because}.`,
      userId: 'userId' in caller ? caller.userId : null,
      data: { ruleId: rule.id },
    })
}
