import { Listener } from '@/lib/db'
import { setRuntime } from '@/lib/http/runtime'
import { seedCode, seedOverlay } from '../collector'
import { createTestDatabase, type TestDatabase } from '../database'
import { seedTeam, testRuntime } from '../people'
import { Swarm } from '../swarm'
import { Bell } from '../until'
import { Awake } from './awake'
import { CollectorProcess } from './collector-process'
import { type Entry, Journal } from './journal'
import { ReportClient } from './report-client'

/** A ring of eight with two chords. */
const NODES = 8
const CHORDS: [number, number][] = [
  [0, 4],
  [2, 6],
]

/** Two collector processes on one database, and an overlay at brisk pace that tells whichever answers. */
export class TwoCollectors {
  readonly journal: Journal
  readonly processes: CollectorProcess[] = []
  readonly awake = new Awake()
  readonly #database: TestDatabase
  readonly #listener: Listener
  readonly #clients: ReportClient[] = []
  readonly #swarm: Swarm
  readonly #overlayId: string

  private constructor(database: TestDatabase, overlayId: string) {
    this.#database = database
    this.#overlayId = overlayId
    this.journal = new Journal(database.url)
    this.#listener = new Listener({ random: Math.random, warn: () => {} }, { url: database.url })
    const clients = new Map<string, ReportClient>()
    this.#swarm = new Swarm(17, {
      pace: 'brisk',
      send: ({ token }, report) => {
        const client = clients.get(token) ?? new ReportClient(this.processes.map(({ url }) => url))
        if (!clients.has(token)) this.#clients.push(client)
        clients.set(token, client)
        return client.send(token, report)
      },
    })
  }

  static async start(): Promise<TwoCollectors> {
    const database = await createTestDatabase()
    setRuntime(testRuntime(database, () => new Date()))
    const { teamId } = await seedTeam(database.orm.em.fork(), 'harbourline', ['owner'], new Date())
    const { id } = await seedOverlay(database, teamId, { slug: 'tides', pace: 'brisk' })
    const two = new TwoCollectors(database, id)
    await two.#start()
    return two
  }

  async #start(): Promise<void> {
    this.awake.start()
    await this.journal.start()
    this.#listener.start()
    await Promise.all([this.addProcess(), this.addProcess()])
    const names = Array.from({ length: NODES }, (_, index) => ({ name: `tar-0${index}` }))
    await this.#swarm.join(await seedCode(this.#database, this.#overlayId, { uses: NODES }), names)
    for (let index = 0; index < NODES; index++) this.#swarm.link(index, (index + 1) % NODES)
    for (const [a, b] of CHORDS) this.#swarm.link(a, b)
    this.#swarm.start()
  }

  async addProcess(): Promise<void> {
    const process = await new CollectorProcess(this.#database.url).start()
    this.processes.push(process)
    const urls = this.processes.map(({ url }) => url)
    for (const client of this.#clients) client.urls = urls
  }

  /** The one that said last that it leads; one that is stopped says nothing. */
  get leading(): CollectorProcess {
    const said = (process: CollectorProcess): number =>
      Math.max(
        0,
        ...process.child.lines.map(logLine).map(({ msg, time }) => (msg === 'leading' ? (time ?? 0) : 0)),
      )
    const [first] = [...this.processes].sort((a, b) => said(b) - said(a))
    if (!first) throw new Error('No collector runs.')
    return first
  }

  get other(): CollectorProcess {
    const found = this.processes.find((process) => process !== this.leading)
    if (!found) throw new Error('There is one collector only.')
    return found
  }

  drop(process: CollectorProcess): void {
    this.processes.splice(this.processes.indexOf(process), 1)
  }

  /** Looks at the journal after each round until it is as wanted. */
  async until(wanted: (entries: readonly Entry[]) => boolean): Promise<Entry[]> {
    const stop = new AbortController()
    const bell = new Bell()
    await this.#listener.subscribe(`overlay:${this.#overlayId}`, () => bell.ring(), stop.signal)
    let entries: Entry[] = []
    const isAsWanted = async () => {
      entries = await this.journal.entries()
      return wanted(entries)
    }
    const explain = () =>
      `${wanted}\n${JSON.stringify(entries.slice(-9))}\n${this.processes.map(({ child }) => child.tail()).join('\n')}`
    await bell.until(isAsWanted, { explain }).finally(() => stop.abort())
    return entries
  }

  async stop(): Promise<void> {
    this.#swarm.stop()
    this.awake.stop()
    await Promise.all(
      this.processes.map(async ({ child }) => {
        child.signal('SIGCONT')
        await child.stop()
      }),
    )
    await this.journal.stop()
    await this.#listener.stop()
    setRuntime(undefined)
    await this.#database.close()
  }
}

function logLine(line: string): { msg?: string; time?: number } {
  try {
    return JSON.parse(line)
  } catch {
    return {}
  }
}
