import { MikroORM, type SqlEntityManager } from '@mikro-orm/postgresql'
import { ormOptions } from './options'

export type { EntityManager } from '@mikro-orm/postgresql'
export type Orm = MikroORM

/** @param statementTimeoutMs the server gives up on a statement after so long; none where left out */
export async function openOrm(url: string, poolMax?: number, statementTimeoutMs?: number): Promise<Orm> {
  return MikroORM.init(ormOptions(url, poolMax, statementTimeoutMs))
}

/** Runs one statement on the manager's connection, inside its transaction if it has one. */
export async function sql<Row extends object = Record<string, unknown>>(
  em: SqlEntityManager,
  text: string,
  params: readonly unknown[] = [],
): Promise<Row[]> {
  return em.getConnection().execute<Row[]>(text, [...params], 'all', em.getTransactionContext())
}
