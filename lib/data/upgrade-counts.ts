import type { Overlay, UpgradeOffer } from '@/entities'
import { isFor } from '@/lib/collector/offers'
import { epochMs, query } from '@/lib/collector/query'
import type { EntityManager } from '@/lib/db'
import { heldMs } from '@/lib/method/control'
import { PACES } from '@/lib/method/pace'
import type { AgentHealth } from '@/lib/method/report'
import type { UpgradeOfferDto, Upgrades } from './dto'

/** What a team's joined agent runs, and what it says of the version it was offered. */
export interface Standing {
  labels: Record<string, string>
  version: string
  heard: boolean
  upgrade: AgentHealth['upgrade']
}

export async function findStandings(
  em: EntityManager,
  { id, pace }: Pick<Overlay, 'id' | 'pace'>,
  teamId: string,
): Promise<Standing[]> {
  const rows = await query<Omit<Standing, 'heard'> & { ageMs: number | null }>(
    em,
    `select a.labels, coalesce(s.node->>'version', a.version) as version, s.node->'health'->'upgrade' as upgrade,
       ${epochMs('clock_timestamp()')} - ${epochMs('s.received_at')} as "ageMs"
     from agents a left join agent_states s on s.agent_id = a.id
     where a.overlay_id = ? and a.team_id = ? and a.state = 'joined'`,
    [id, teamId],
  )
  const heldForMs = heldMs(PACES[pace].intervalMs)
  return rows.map(({ ageMs, ...row }) => ({ ...row, heard: ageMs !== null && ageMs <= heldForMs }))
}

export function toOffer(offer: UpgradeOffer, standings: readonly Standing[]): UpgradeOfferDto {
  const { id, version, offeredAt, offeredBy, haltedAt } = offer
  const [key, value] = [offer.labelKey ?? null, offer.labelValue ?? null]
  return {
    id,
    version,
    label: key === null || value === null ? null : { key, value },
    offeredAt: offeredAt.toISOString(),
    offeredBy: offeredBy?.name ?? null,
    haltedAt: haltedAt?.toISOString() ?? null,
    counts: countsOf(
      version,
      standings.filter(({ labels }) => isFor(labels, key, value)),
    ),
  }
}

/** Of the agents an offer is for. One that is just taking it still waits; unheard ones are in the first count only. */
export function countsOf(version: string, standings: readonly Standing[]): UpgradeOfferDto['counts'] {
  const others = standings.filter((standing) => standing.version !== version)
  const said = (state: string) => (standing: Standing) =>
    standing.upgrade?.version === version && standing.upgrade.state === state
  const [failed, declined] = [others.filter(said('failed')), others.filter(said('declined'))]
  return {
    offered: standings.length,
    runs: standings.length - others.length,
    failed: failed.length,
    declined: declined.length,
    waiting: others.filter((one) => one.heard && !failed.includes(one) && !declined.includes(one)).length,
  }
}

/** Most first. */
export function versionsOf(standings: readonly Standing[]): Upgrades['versions'] {
  const counts = new Map<string, number>()
  for (const { version } of standings) counts.set(version, (counts.get(version) ?? 0) + 1)
  return [...counts]
    .map(([version, agents]) => ({ version, agents }))
    .sort((a, b) => b.agents - a.agents || (a.version < b.version ? 1 : -1))
}
