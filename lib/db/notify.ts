import { type EntityManager, sql } from './orm'

/** PostgreSQL refuses payloads of 8000 bytes and more: send a name to look up, not the thing itself. */
export const NOTICE_MAX_BYTES = 7_999

/** Tells every process that listens; inside a transaction, once it commits. */
export async function notify(em: EntityManager, channel: string, payload: string): Promise<void> {
  await sql(em, 'select pg_notify(?, ?)', [channel, payload])
}
