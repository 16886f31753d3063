import { MikroORM, type SqlEntityManager } from '@mikro-orm/postgresql'
import { ormOptions, type SessionLimits } from './options'

export type { EntityManager } from '@mikro-orm/postgresql'
export type Orm = MikroORM

export async function openOrm(url: string, poolMax?: number, limits?: SessionLimits): Promise<Orm> {
  return MikroORM.init(ormOptions(url, poolMax, limits))
}

/** Runs one statement on the manager's connection, inside its transaction if it has one. */
export async function sql<Row extends object = Record<string, unknown>>(
  em: SqlEntityManager,
  text: string,
  params: readonly unknown[] = [],
): Promise<Row[]> {
  return em.getConnection().execute<Row[]>(text, [...params], 'all', em.getTransactionContext())
}
