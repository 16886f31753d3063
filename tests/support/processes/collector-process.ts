import { readFileSync } from 'node:fs'
import { COLLECTOR_FOLDER } from '@/scripts/lib/collector-file.mjs'
import { childrenOf } from '@/scripts/lib/processes.mjs'
import { Child, ROOT } from '../e2e/child'
import { within } from '../until'

const LISTENING = /^Collector listens on (http:\S+)$/

/** `npm run collector` on a port of its own: one process that leads, and two that take reports in. */
export class CollectorProcess {
  readonly child: Child
  readonly listening: Promise<string>
  url = ''

  constructor(databaseUrl: string, env: Record<string, string> = {}) {
    let heard = (_url: string) => {}
    const said = new Promise<string>((resolve) => {
      heard = resolve
    })
    this.child = new Child(process.execPath, ['scripts/collector.mjs'], {
      cwd: ROOT,
      group: true,
      env: {
        ...{ PORT: '0', DATABASE_URL: databaseUrl, NODE_ENV: 'production', INGEST_PROCESSES: '2' },
        ...env,
      },
      onLine: (line) => {
        const url = LISTENING.exec(line)?.[1]
        if (url) heard(url)
      },
    })
    const ended = this.child.end.then((how) => {
      throw new Error(`The collector ${how}.\n${this.child.tail()}`)
    })
    this.listening = within('the collector listens', Promise.race([said, ended]), {
      explain: () => this.child.tail(),
    })
    // One that is stopped later has been waited for already.
    this.listening.catch(() => undefined)
  }

  async start(): Promise<this> {
    this.url = await this.listening
    return this
  }

  /** Those that take reports in. */
  get intakes(): number[] {
    return childrenOf(this.child.pid).filter((pid) => commandOf(pid).includes(`/${COLLECTOR_FOLDER}/`))
  }
}

/** Its words, with NUL after each: proc(5). */
function commandOf(pid: number): string {
  try {
    return readFileSync(`/proc/${pid}/cmdline`, 'utf8')
  } catch {
    return ''
  }
}
