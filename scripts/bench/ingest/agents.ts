import { RECEIPT_INTERVALS } from '@/lib/method/statement'
import type { BenchDatabase } from '../server/bench-database'
import { joinAll, makeOverlay } from '../server/joined'
import { type LoadJob, NUMBER_PLACE } from './load'
import { simulatedReports } from './reports'

export type Agent = LoadJob['agents'][number]

/** Two overlays in turn, until there are agents enough. */
const SIZES = [36, 200]
const INCARNATION = 'of-the-bench'

/** Agents with sessions and the bodies that they send in turn: one in so many asks for a receipt, as agents do. */
export async function makeAgents(database: BenchDatabase, url: string, least: number): Promise<Agent[]> {
  const overlays: Agent[][] = []
  for (let count = 0; overlays.flat().length < least; count++) {
    const nodes = SIZES[count % SIZES.length] ?? 36
    const { code } = await makeOverlay(database, { slug: `tides-${count}`, pace: 'steady', agents: nodes })
    const names = Array.from({ length: nodes }, (_, index) => `tar-${index}`)
    const joined = await joinAll(url, code, names)
    const reports = simulatedReports(
      nodes,
      joined.map(({ agentId }) => agentId),
    )
    overlays.push(
      joined.map(({ agentId, token }, index) => ({
        agentId,
        token,
        bodies: Array.from({ length: RECEIPT_INTERVALS }, (_, turn) => {
          const rest = { ...reports[index], incarnation: INCARNATION, number: undefined }
          const wants = turn === 0 ? { wantsReceipt: true } : {}
          return `{${NUMBER_PLACE},${JSON.stringify({ ...rest, protocol: 2, ...wants }).slice(1)}`
        }),
      })),
    )
  }
  // From all overlays alike, however few of the agents are used.
  const longest = Math.max(...overlays.map(({ length }) => length))
  return Array.from({ length: longest }, (_, index) =>
    overlays.flatMap((agents) => agents.slice(index, index + 1)),
  ).flat()
}
