import { createHash } from 'node:crypto'
import { query } from '@/lib/collector/query'
import { type EntityManager, sql } from '@/lib/db'
import type { AgentRelease } from './dto'

/** The agent of one version as one file. */
export interface Release {
  version: string
  /** Of the bytes, hexadecimal. */
  sha256: string
  bytes: Uint8Array<ArrayBuffer>
}

/**
 * Keeps the file of a version, which is the current one from now on: the last to be added is. Adding what is current
 * already changes nothing. @throws where the bytes do not have that digest
 */
export async function addRelease(em: EntityManager, { version, sha256, bytes }: Release): Promise<void> {
  if (createHash('sha256').update(bytes).digest('hex') !== sha256)
    throw new Error(`The agent of version ${version} does not have the digest that is said of it.`)
  const [current] = await query<{ version: string; sha256: string }>(
    em,
    'select version, sha256 from agent_releases order by added_at desc limit 1',
  )
  if (current?.version === version && current.sha256 === sha256) return
  await sql(
    em,
    `insert into agent_releases (version, sha256, bytes, added_at)
     values (?, ?, decode(?, 'base64'), clock_timestamp())
     on conflict (version) do update set sha256 = excluded.sha256, bytes = excluded.bytes, added_at = excluded.added_at`,
    [version, sha256, Buffer.from(bytes).toString('base64')],
  )
}

/** @param version null for the current one. @returns null where there is none */
export async function findRelease(em: EntityManager, version: string | null): Promise<Release | null> {
  const [row] = await query<{ version: string; sha256: string; bytes: Buffer }>(
    em,
    `select version, sha256, bytes from agent_releases
     where version = coalesce(?::text, version) order by added_at desc limit 1`,
    [version],
  )
  return row ? { ...row, bytes: new Uint8Array(row.bytes) } : null
}

/** Newest first. */
export async function listReleases(em: EntityManager): Promise<AgentRelease[]> {
  const rows = await query<Omit<AgentRelease, 'addedAt' | 'current'> & { addedAt: Date }>(
    em,
    `select version, sha256, octet_length(bytes) as bytes, added_at as "addedAt"
     from agent_releases order by added_at desc`,
  )
  return rows.map((row, index) => ({
    ...row,
    addedAt: new Date(row.addedAt).toISOString(),
    current: index === 0,
  }))
}
