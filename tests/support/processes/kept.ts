import { expect } from 'vitest'
import type { EntityManager } from '@/lib/db'
import { sql } from '@/lib/db'
import type { Sums } from '@/lib/method/report'
import { someReport } from '../reports'
import type { ReporterState } from './reporters'

/**
 * What the database holds of agents: none behind its last answer, none ahead of what it sent, and each exactly the report
 * of its number, nothing added to it.
 */
export async function expectKept(em: EntityManager, states: readonly ReporterState[]): Promise<void> {
  // They go on meanwhile.
  const answeredBefore = states.map(({ answered }) => answered)
  const rows = await sql<{ id: string; number: string; sums: Sums; late: number }>(
    em,
    `select agent_id as id, report_number as number, sums, late_reports as late from agent_states`,
  )
  const held = new Map(rows.map((row) => [row.id, row]))
  expect(states.map(({ member }) => member.agentId).filter((id) => !held.has(id))).toEqual([])
  for (const [index, { member, sent }] of states.entries()) {
    const row = held.get(member.agentId)
    const number = Number(row?.number)
    expect(number).toBeGreaterThanOrEqual(answeredBefore[index] ?? 0)
    expect(number).toBeLessThanOrEqual(sent)
    expect(row).toMatchObject({ sums: someReport(number).sums, late: 0 })
  }
}
