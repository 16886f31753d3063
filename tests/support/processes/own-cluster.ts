import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { startCluster } from '@/scripts/lib/postgres.mjs'
import { endProcess } from '@/scripts/lib/processes.mjs'
import { freePort } from '../free-port'

/** A cluster that keeps what it has confirmed, whatever happens: PostgreSQL's own settings. */
export class OwnCluster {
  readonly #folder = mkdtempSync(join(tmpdir(), 'thinspan-kills-'))
  #cluster: Awaited<ReturnType<typeof startCluster>> | null = null

  /** Where a database may be made. On the same port each time: one that nobody takes in between. */
  async start(): Promise<string> {
    if (!this.#cluster) writeFileSync(join(this.#folder, 'port'), String(await freePort()))
    this.#cluster = await startCluster({ folder: this.#folder })
    return this.#cluster.url('postgres')
  }

  /** SIGQUIT is PostgreSQL's immediate shutdown: nothing is written any more, the next start recovers. */
  async crash(): Promise<void> {
    const identity = this.#cluster?.identity
    if (identity) await endProcess(identity, { signals: [{ name: 'SIGQUIT', patienceMs: 60_000 }] })
  }

  async stop(): Promise<void> {
    await this.#cluster?.stop()
    rmSync(this.#folder, { recursive: true, force: true })
  }
}
