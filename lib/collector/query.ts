import { type EntityManager, STATEMENT_TIMEOUT_MS } from '@/lib/db'

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

/** A statement whose text never changes, by a name of its own: each connection reads and plans it once. */
export interface Statement {
  name: string
  text: string
}

/** The server itself gives a statement up before that; a connection on which nothing of it is heard is given up then. */
export const PREPARED_ANSWERS_MS = STATEMENT_TIMEOUT_MS + 5_000

/** As the driver says it (pg 8.20, lib/client.js). */
export const READ_TIMEOUT = 'Query read timeout'

/**
 * For the few statements that come with every batch of reports, outside transactions: straight to the driver, with `$1` for the
 * first value and lists as arrays, so that neither side reads a text that is as long as the batch. Bytes are sent as they are, in the binary
 * format of the value's type: for a text its UTF-8.
 */
export async function prepared<Row extends object>(
  em: EntityManager,
  statement: Statement,
  values: readonly (Bindable | Uint8Array | readonly Bindable[])[],
  answersMs = PREPARED_ANSWERS_MS,
): Promise<Row[]> {
  const { client } = em.getKnex()
  const connection = await client.acquireConnection()
  try {
    const { rows } = await connection.query({ ...statement, values, query_timeout: answersMs })
    return rows
  } catch (error) {
    // An answer that still comes would be taken for the next statement's: so knex is told not to use it again.
    if (error instanceof Error && error.message === READ_TIMEOUT) connection.__knex__disposed = error
    throw error
  } finally {
    client.releaseConnection(connection)
  }
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
