import type { EntityManager } from '@/lib/db'

export type Bindable = string | number | boolean | Date | null

/**
 * One statement with its values bound, inside the manager's transaction if it has one. Large JSON goes this way:
 * the ORM's own raw queries write values into the text.
 */
export async function query<Row extends object = Record<string, unknown>>(
  em: EntityManager,
  text: string,
  params: readonly Bindable[] = [],
): Promise<Row[]> {
  const raw = em.getKnex().raw<{ rows: Row[] }>(text, [...params])
  const transaction = em.getTransactionContext()
  if (transaction) raw.transacting(transaction)
  return (await raw).rows
}

/** Milliseconds since 1970 of a timestamp expression, as a number. */
export function epochMs(expression: string): string {
  return `(extract(epoch from ${expression}) * 1000)::float8`
}

/** The gravest of a column of names, over a group; compared as numbers, which is faster than as places in a list. */
export function gravest(column: string, fromLeast: readonly string[]): string {
  const ranks = fromLeast.map((name, rank) => `when '${name}' then ${rank + 1}`)
  return `(array[${fromLeast.map((name) => `'${name}'`).join(', ')}])[max(case ${column} ${ranks.join(' ')} end)]`
}
