import { Child, ROOT } from '../e2e/child'
import { within } from '../until'

const LISTENING = /^Collector listens on (http:\S+)$/

/** `npm run collector` on a port of its own. */
export class CollectorProcess {
  readonly child: Child
  readonly listening: Promise<string>
  url = ''

  constructor(databaseUrl: string, env: Record<string, string> = {}) {
    let heard = (_url: string) => {}
    const said = new Promise<string>((resolve) => {
      heard = resolve
    })
    const args = ['--import', 'tsx', '--conditions=react-server', 'scripts/collector.ts']
    this.child = new Child(process.execPath, args, {
      cwd: ROOT,
      env: { PORT: '0', DATABASE_URL: databaseUrl, NODE_ENV: 'production', ...env },
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
}
