/**
 * The floor of this machine, which nobody tunes downward: bare `node:http`, JSON.parse, a few milliseconds of collecting, one
 * multi-row statement into a table of the shape that reports are kept in, answers after the commit. It asks nobody who they
 * are, checks nothing and says nothing back. A program of its own; DATABASE_URL.
 */
import { createServer, type IncomingMessage, type ServerResponse } from 'node:http'
import { gunzipSync } from 'node:zlib'
import pg from 'pg'

const BATCH_MS = 5
const BATCH_MOST = 500
const CONNECTIONS = 10

/** As sent; the floor checks nothing. */
type Sent = Readonly<
  Record<'incarnation' | 'number' | 'ordersSequence' | 'sums' | 'node' | 'complaints', unknown>
>

interface Waiting {
  agentId: string
  report: Sent
  response: ServerResponse
}

const pool = new pg.Pool({ connectionString: process.env.DATABASE_URL, max: CONNECTIONS })
await pool.query(`create table if not exists bench_states (
  agent_id uuid primary key, overlay_id uuid not null, incarnation text not null, report_number bigint not null,
  orders_sequence bigint not null, sums json not null, node json not null, complaints jsonb not null,
  relayed boolean not null, received_at timestamptz not null) with (fillfactor = 50, toast_tuple_target = 4080)`)
await pool.query('create index if not exists bench_states_overlay on bench_states (overlay_id)')

let waiting: Waiting[] = []
let timer: NodeJS.Timeout | null = null

const COLUMNS =
  'agent_id, overlay_id, incarnation, report_number, orders_sequence, sums, node, complaints, relayed'
const KEPT = [...COLUMNS.split(', ').slice(1), 'received_at'].map((name) => `${name} = excluded.${name}`)

async function flush(): Promise<void> {
  if (timer) clearTimeout(timer)
  timer = null
  const batch = waiting
  waiting = []
  const latest = new Map(batch.map((one) => [one.agentId, one]))
  const rows = [...latest.values()].sort((a, b) => (a.agentId < b.agentId ? -1 : 1))
  const values: unknown[] = []
  const places = rows.map(({ agentId, report }) => {
    const at = values.length
    values.push(
      agentId,
      agentId,
      report.incarnation,
      report.number,
      report.ordersSequence,
      JSON.stringify(report.sums),
      JSON.stringify(report.node),
      JSON.stringify(report.complaints ?? []),
      false,
    )
    return `(${Array.from({ length: 9 }, (_, index) => `$${at + index + 1}`).join(', ')}, clock_timestamp())`
  })
  let status = 200
  try {
    await pool.query(
      `insert into bench_states (${COLUMNS}, received_at) values ${places.join(', ')}
       on conflict (agent_id) do update set ${KEPT.join(', ')}`,
      values,
    )
  } catch {
    status = 500
  }
  for (const { response } of batch)
    response.writeHead(status, { 'content-type': 'application/json' }).end('{"orders":null,"ordersAgeMs":0}')
}

async function take(request: IncomingMessage, response: ServerResponse): Promise<void> {
  const chunks: Buffer[] = []
  for await (const chunk of request) chunks.push(chunk)
  const body = Buffer.concat(chunks)
  const plain = request.headers['content-encoding'] === 'gzip' ? gunzipSync(body) : body
  waiting.push({
    agentId: String(request.headers['x-agent']),
    report: JSON.parse(plain.toString()),
    response,
  })
  if (waiting.length >= BATCH_MOST) void flush()
  else timer ??= setTimeout(flush, BATCH_MS)
}

const server = createServer((request, response) => void take(request, response))
server.listen(0, '127.0.0.1', () => {
  const address = server.address()
  const port = typeof address === 'object' && address ? address.port : 0
  process.stdout.write(`Baseline listens on http://127.0.0.1:${port}\n`)
})
