/**
 * The load, in a process of its own: so many connections, each an agent that reports as soon as it is answered. Takes one line
 * of JSON on standard input, prints one. Bodies are made beforehand and only their number changes, so that the load costs
 * little beside what it loads.
 */
import { connect, type Socket } from 'node:net'
import { z } from 'zod'
import { delay, doJobs } from '../server/job'

const jobSchema = z.object({
  url: z.url(),
  seconds: z.number(),
  /** Reports before this are not counted. */
  warmUpSeconds: z.number(),
  /** The first number that each agent has not yet used; all of seven digits. */
  firstNumber: z.number().int().min(1_000_000).max(9_000_000),
  agents: z.array(z.object({ agentId: z.string(), token: z.string(), bodies: z.array(z.string()) })),
})
export type LoadJob = z.infer<typeof jobSchema>

export const loadResultSchema = z.object({
  reportsPerSecond: z.number(),
  p50Ms: z.number(),
  p99Ms: z.number(),
  failures: z.number(),
  /** One of them, where there were any. */
  failure: z.string().nullable(),
  lastNumber: z.number(),
  cpuSeconds: z.number(),
})
export type LoadResult = z.infer<typeof loadResultSchema>

/** In bodies, where the number goes. */
export const NUMBER_PLACE = '"number":1000000'

const HEADER_END = Buffer.from('\r\n\r\n')

type OnAnswer = (status: number, ms: number, body: string) => void

class Connection {
  readonly #socket: Socket
  readonly #requests: { bytes: Buffer; numberAt: number }[]
  readonly #onAnswer: OnAnswer
  #received: Buffer = Buffer.alloc(0)
  #sentAtMs = 0
  #turn = 0
  number: number

  constructor(job: LoadJob, agent: LoadJob['agents'][number], onAnswer: OnAnswer) {
    const { hostname, port } = new URL(job.url)
    this.number = job.firstNumber
    this.#onAnswer = onAnswer
    this.#requests = agent.bodies.map((body) => {
      const head = `POST /api/agent/report HTTP/1.1\r\nhost: ${hostname}\r\ncontent-type: application/json\r\nauthorization: Bearer ${agent.token}\r\nx-agent: ${agent.agentId}\r\ncontent-length: ${Buffer.byteLength(body)}\r\n\r\n`
      const bytes = Buffer.from(head + body)
      return { bytes, numberAt: bytes.indexOf(NUMBER_PLACE) + NUMBER_PLACE.length - 7 }
    })
    this.#socket = connect(Number(port), hostname)
    this.#socket.setNoDelay(true)
    this.#socket.on('connect', () => this.#send())
    this.#socket.on('data', (chunk) => this.#take(chunk))
    this.#socket.on('error', (error) => onAnswer(0, 0, error.message))
  }

  end(): void {
    this.#socket.destroy()
  }

  #send(): void {
    const request = this.#requests[this.#turn++ % this.#requests.length]
    if (!request) return
    request.bytes.write(String(this.number++), request.numberAt, 'latin1')
    this.#sentAtMs = performance.now()
    this.#socket.write(request.bytes)
  }

  #take(chunk: Buffer): void {
    this.#received = this.#received.length === 0 ? chunk : Buffer.concat([this.#received, chunk])
    const headerEnd = this.#received.indexOf(HEADER_END)
    if (headerEnd < 0) return
    const head = this.#received.toString('latin1', 0, headerEnd)
    const length = /content-length: (\d+)/i.exec(head)?.[1]
    const isWhole =
      length === undefined
        ? this.#received.includes('\r\n0\r\n\r\n')
        : this.#received.length >= headerEnd + 4 + Number(length)
    if (!isWhole) return
    const body = this.#received.toString('utf8', headerEnd + 4)
    this.#received = Buffer.alloc(0)
    this.#onAnswer(Number(head.slice(9, 12)), performance.now() - this.#sentAtMs, body)
    this.#send()
  }
}

async function run(job: LoadJob): Promise<LoadResult> {
  const times: number[] = []
  let failures = 0
  let failure: string | null = null
  let counts = false
  const connections = job.agents.map(
    (agent) =>
      new Connection(job, agent, (status, ms, body) => {
        if (status !== 200) {
          failures += 1
          failure ??= `${status} ${body.slice(0, 300)}`
        } else if (counts) times.push(ms)
      }),
  )
  await delay(job.warmUpSeconds)
  counts = true
  const startedAtMs = performance.now()
  const before = process.cpuUsage()
  await delay(job.seconds)
  const { user, system } = process.cpuUsage(before)
  const seconds = (performance.now() - startedAtMs) / 1000
  for (const connection of connections) connection.end()
  times.sort((a, b) => a - b)
  const at = (share: number): number => times[Math.floor(share * (times.length - 1))] ?? 0
  return {
    reportsPerSecond: times.length / seconds,
    p50Ms: at(0.5),
    p99Ms: at(0.99),
    failures,
    failure,
    lastNumber: Math.max(...connections.map(({ number }) => number)),
    cpuSeconds: (user + system) / 1e6,
  }
}

if (process.argv[1] === import.meta.filename) await doJobs(jobSchema, run)
