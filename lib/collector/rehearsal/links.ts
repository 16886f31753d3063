import { isHeard } from '@/lib/method/control'
import type { Pace } from '@/lib/method/pace'
import type { Loaded } from '../leader-load'
import { joinNamings } from '../namings'
import type { TakableLink } from './taken'

/** Live links as their ends name them, where a rehearsal asks for links. */
export function linksFor(
  { disclosure, rehearsals, snapshot }: Pick<Loaded, 'disclosure' | 'rehearsals' | 'snapshot'>,
  { intervalMs }: Pace,
): TakableLink[] {
  const isAsked = rehearsals.some(({ exclude }) => exclude.links.length + exclude.between.length > 0)
  if (!isAsked || disclosure !== 'named') return []
  const namings = snapshot.agents.flatMap((agent) =>
    agent.last
      ? [
          {
            agentId: agent.agentId,
            name: agent.name,
            heard: isHeard(agent, snapshot.atMs, intervalMs),
            heardAtMs: agent.last.receivedAtMs,
            links: agent.last.report.node.links,
          },
        ]
      : [],
  )
  return joinNamings(namings, () => null).filter(({ state }) => state === 'live')
}
