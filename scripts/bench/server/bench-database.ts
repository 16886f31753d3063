import { mkdtempSync, readFileSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import pg from 'pg'
import { startCluster } from '../../lib/postgres.mjs'
import { figuresWithChildrenOf } from '../agent/process-figures'
import { Program } from './program'

/** A PostgreSQL cluster of the bench's own with PostgreSQL's own settings: what it confirms is on disk. */
export class BenchDatabase {
  url = ''
  readonly #folder = mkdtempSync(join(tmpdir(), 'thinspan-bench-'))
  #cluster: Awaited<ReturnType<typeof startCluster>> | null = null
  #client: pg.Client | null = null

  async start(): Promise<void> {
    this.#cluster = await startCluster({ folder: this.#folder })
    this.url = this.#cluster.url('postgres')
    await Program.script('scripts/migrate.ts', [], { DATABASE_URL: this.url }).ended()
    this.#client = new pg.Client({ connectionString: this.url })
    await this.#client.connect()
  }

  async query<Row extends object>(text: string, values: readonly unknown[] = []): Promise<Row[]> {
    if (!this.#client) throw new Error('Start the database first.')
    return (await this.#client.query<Row>(text, [...values])).rows
  }

  /** Of all its processes together, those that have ended included. */
  figures(): { cpuSeconds: number; rssMib: number } {
    const server = this.#cluster?.identity?.pid
    if (server === undefined) throw new Error('Start the database first.')
    const { cpuSeconds, rssMib } = figuresWithChildrenOf(server)
    return { cpuSeconds: cpuSeconds + endedCpuSeconds(server), rssMib }
  }

  /** Bytes written ahead so far. */
  async logBytes(): Promise<number> {
    const [row] = await this.query<{ bytes: string }>(
      `select pg_wal_lsn_diff(pg_current_wal_lsn(), '0/0') as bytes`,
    )
    return Number(row?.bytes)
  }

  async stop(): Promise<void> {
    await this.#client?.end()
    await this.#cluster?.stop()
    rmSync(this.#folder, { recursive: true, force: true })
  }
}

/** cutime and cstime, in hundredths of a second: proc(5). */
function endedCpuSeconds(pid: number): number {
  const fields = readFileSync(`/proc/${pid}/stat`, 'utf8').split(') ').at(-1)?.split(' ') ?? []
  return (Number(fields[13]) + Number(fields[14])) / 100
}
