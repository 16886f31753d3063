import type { EventDraft, JudgedAgent } from './judge'
import type { Memory } from './memory'
import { eventOf, nodesList, type Said } from './said'
import type { VerdictFacts } from './verdict'
import { countOf, isOrAre } from './words'

/** More agents than this are counted, not named. */
const MOST_NAMED = 3

/** What changed between two judgements, for the list of events. */
export function happenings(
  before: Memory,
  after: Memory,
  agents: readonly JudgedAgent[],
  { joined, heard, late }: Pick<VerdictFacts, 'joined' | 'heard' | 'late'>,
): EventDraft[] {
  const events: EventDraft[] = []
  const silent = agents.filter(({ agentId }) => agentId in after.unheard && !(agentId in before.unheard))
  if (silent.length > 0)
    events.push(eventOf('agent-unheard', [...namesOf(silent), ` ${isOrAre(silent.length)} unheard`]))
  const back = agents.filter(({ agentId, heard: now }) => now && agentId in before.unheard)
  if (back.length > 0)
    events.push(eventOf('agent-heard', [...namesOf(back), ` ${isOrAre(back.length)} heard again`]))
  if (after.withheld && !before.withheld)
    events.push({
      kind: 'withheld',
      text: `Reading withheld: ${heard - late} of ${joined} agents heard in time`,
    })
  if (after.treatAsSplit && !before.treatAsSplit)
    events.push({ kind: 'level-changed', text: 'Treat as split: agents fell silent together' })
  else if (after.level !== null && after.level !== before.level)
    events.push({
      kind: 'level-changed',
      text: before.level === null ? `First judged ${after.level}` : `From ${before.level} to ${after.level}`,
    })
  if (before.withheld && !after.withheld && before.last !== null)
    events.push({ kind: 'resumed', text: 'Reading resumed' })
  return events
}

function namesOf(agents: readonly JudgedAgent[]): Said {
  if (agents.length > MOST_NAMED) return [countOf(agents.length, 'node')]
  return nodesList(agents.map(({ name }) => name))
}
