/** Who is named in what a collector is sent, says, logs and keeps. */
import type pg from 'pg'
import type { Member } from './collector'

export interface Record {
  where: string
  text: string
  /** Whose own it is, by place among the members: being named in one's own report tells nothing. */
  of?: number
}

export interface Found {
  where: string
  /** Places of those named, but for the one whose record it is, in the order in which they first stand there. */
  named: number[]
  text: string
}

/** Finds members by id, name, and public key, as text, as PostgreSQL writes bytes, and in base64url. */
export class Naming {
  private readonly marks: readonly (readonly string[])[]

  constructor(members: readonly Pick<Member, 'agentId' | 'name' | 'keys'>[]) {
    this.marks = members.map(({ agentId, name, keys }) => {
      const id = Buffer.from(agentId.replaceAll('-', ''), 'hex')
      const key = Buffer.from(keys.publicKey, 'base64url')
      const spelled = [id, key].flatMap((bytes) => [bytes.toString('hex'), bytes.toString('base64url')])
      return [agentId, name, ...spelled]
    })
  }

  /** Records that name anybody but whom they are of. */
  find(records: readonly Record[]): Found[] {
    return records.flatMap(({ where, text, of }) => {
      const placed = this.marks.flatMap((marks, member) => {
        const at = member === of ? [] : marks.map((mark) => text.indexOf(mark)).filter((found) => found >= 0)
        return at.length > 0 ? [{ member, at: Math.min(...at) }] : []
      })
      const named = placed.sort((a, b) => a.at - b.at).map(({ member }) => member)
      return named.length > 0 ? [{ where, named, text }] : []
    })
  }
}

/** Every row of every table there is, whole. */
export async function allRows(client: Pick<pg.Client, 'query'>): Promise<Record[]> {
  const { rows: tables } = await client.query<{ schema: string; name: string }>(
    `select table_schema as schema, table_name as name from information_schema.tables
     where table_type = 'BASE TABLE' and table_schema not in ('pg_catalog', 'information_schema')`,
  )
  const records: Record[] = []
  for (const { schema, name } of tables) {
    const { rows } = await client.query<{ text: string }>(
      `select kept::text as text from "${schema}"."${name}" kept`,
    )
    records.push(...rows.map(({ text }) => ({ where: `${schema}.${name}`, text })))
  }
  return records
}
