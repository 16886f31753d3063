import pg from 'pg'
import { z } from 'zod'
import type { TestDatabase } from '../database'

export interface Plan {
  text: string
  /** Planning and execution. */
  tookMs: number
  /** Partitions that were looked into, or would have been. */
  tables: string[]
}

const nodeSchema = z.object({
  'Relation Name': z.string().optional(),
  get Plans() {
    return z.array(nodeSchema).optional()
  },
})
const explainedSchema = z.tuple([
  z.object({ 'Planning Time': z.number(), 'Execution Time': z.number(), Plan: nodeSchema }),
])
type PlanNode = z.infer<typeof nodeSchema>

/** How the database answers each statement of `run`: all are run again, explained, with what was bound. */
export async function plansOf(database: TestDatabase, run: () => Promise<unknown>): Promise<Plan[]> {
  const statements: { sql: string; bindings: unknown[] }[] = []
  const knex = database.orm.em.fork().getKnex()
  const note = ({ sql, bindings = [] }: { sql: string; bindings?: unknown[] }) => {
    if (/^\s*(select|with)/i.test(sql)) statements.push({ sql, bindings })
  }
  knex.on('query', note)
  await run().finally(() => knex.off('query', note))
  const client = new pg.Client({ connectionString: database.url })
  await client.connect()
  try {
    const plans: Plan[] = []
    for (const { sql, bindings } of statements) {
      const { rows } = await client.query(`explain (analyze, format json) ${sql}`, bindings)
      const [explained] = explainedSchema.parse(rows[0]['QUERY PLAN'])
      plans.push({
        text: sql.replace(/\s+/g, ' ').trim(),
        tookMs: explained['Planning Time'] + explained['Execution Time'],
        tables: [...new Set(tablesIn(explained.Plan))].sort(),
      })
    }
    return plans
  } finally {
    await client.end()
  }
}

function tablesIn(node: PlanNode): string[] {
  const own = node['Relation Name']
  return [...(own === undefined ? [] : [own]), ...(node.Plans ?? []).flatMap(tablesIn)]
}
