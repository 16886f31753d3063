/**
 * The many neighbours of a hub, in one process. Composition root; argument: JSON of `Wanted`. Says "ready" once all are
 * linked, then a line of JSON (`LightFigures`) per second, and ends with its standard input.
 */
import { randomBytes } from 'node:crypto'
import { createClock, createHttpCollector, createPost, createWsTransport, enrol } from '@/agent'
import { Trust } from '@/agent/trust/key-ring'
import type { OrdersProof } from '@/lib/method/frame'
import { createRandom, forkRandom } from '@/lib/method/random'
import { AGENT_PROTOCOL, generateKeys, type PassResult } from '@/lib/protocol'
import { countingTransport, type LinkCounts } from './counting-transport'
import { LightNeighbour } from './light-neighbour'
import { BATCH_PATH, batchReplySchema, type ReportBatch } from './report-batch'
import { type LightFigures, wantedSchema } from './wanted'

/** Ticks and reports are spread over their periods in so many groups. */
const GROUPS = 40
/** Their last reports are held for six. */
const REPORT_INTERVALS = 2
/** Dialed at once: a listener takes no more than 64 of one address that have not proved themselves. */
const DIALED_AT_ONCE = 16

const wanted = wantedSchema.parse(JSON.parse(process.argv[2] ?? ''))
const { signal } = new AbortController()
const monotonicMs = () => performance.now()
const clock = createClock({ monotonicMs, epochMs: () => Date.now() })
const random = createRandom(randomBytes(16).toString('hex'))
const post = createPost()
const collector = createHttpCollector({ post, clock }, { baseUrl: wanted.collector })
const counts: LinkCounts = { bytes: 0, messages: 0 }
const transport = countingTransport(createWsTransport({ clock }), counts)
const neighbours: LightNeighbour[] = []
let trust: Trust | null = null
let ticks = 0

/** The hub shows all of them the same pass. */
const judged = new Map<string, Promise<PassResult>>()
const judgePass = (ring: Trust) => (token: string) => {
  const present = judged.get(token) ?? ring.judgePass(token, new Date())
  judged.set(token, present)
  return present
}

for (let index = 0; index < wanted.count; index++) {
  const keys = generateKeys()
  const name = `${wanted.prefix}-${index}`
  const enrolled = await enrol(
    { collector, keys },
    { code: wanted.code, name, labels: {}, address: null, version: '0.1.0-light' },
    signal,
  )
  if (!enrolled.ok) throw new Error(`${name} is not enrolled: ${enrolled.error.code}`)
  const { overlay, overlayKey, pace } = enrolled.value
  trust ??= new Trust({ overlayId: overlay.id, ring: { version: 1, keys: [overlayKey] } })
  neighbours.push(
    new LightNeighbour(
      {
        transport,
        clock,
        random: forkRandom(random, name),
        randomBytes,
        trust,
        judgePass: judgePass(trust),
      },
      { enrolled: enrolled.value, keys, pace },
    ),
  )
}

const groups = Array.from({ length: GROUPS }, (_, group) =>
  neighbours.filter((_, index) => index % GROUPS === group),
)

/** Goes through the groups evenly, one period for all. What is late by more than a period is not made up for. */
function inTurn(periodMs: () => number, run: (group: LightNeighbour[]) => void): void {
  let group = 0
  let dueAtMs = monotonicMs()
  const step = () => {
    const nowMs = monotonicMs()
    dueAtMs = Math.max(dueAtMs, nowMs - periodMs())
    for (; dueAtMs <= nowMs; dueAtMs += periodMs() / GROUPS) {
      run(groups[group] ?? [])
      group = (group + 1) % GROUPS
    }
    setTimeout(step, Math.max(0, dueAtMs - monotonicMs()))
  }
  step()
}

const paceNow = () => neighbours[0]?.paceNow ?? { tickMs: 200, intervalMs: 2_000 }

function followAll(proof: OrdersProof, ageMs: number): void {
  const judged = trust?.judgeOrders(proof)
  if (judged?.ok) for (const one of neighbours) one.follow(judged.orders, ageMs, proof)
}

async function report(group: readonly LightNeighbour[]): Promise<void> {
  const batch: ReportBatch = group.map((one) => {
    const { report, wantsReceipt } = one.report()
    return { agentId: one.agentId, report: { ...report, protocol: AGENT_PROTOCOL, wantsReceipt } }
  })
  const reply = await post(new URL(BATCH_PATH, wanted.collector), {
    headers: { 'content-type': 'application/json' },
    body: JSON.stringify(batch),
    signal,
    maxReplyBytes: 4 * 1024 * 1024,
  })
  const { signedOrders, ordersAgeMs, receipts } = batchReplySchema.parse(JSON.parse(reply.text ?? ''))
  if (signedOrders) followAll(signedOrders, ordersAgeMs)
  const byId = new Map(group.map((one) => [one.agentId, one]))
  for (const { agentId, receipt } of receipts) byId.get(agentId)?.takeReceipt(receipt)
}

inTurn(
  () => paceNow().tickMs,
  (group) => {
    for (const one of group) one.tick()
    ticks += group.length
  },
)
inTurn(
  () => REPORT_INTERVALS * paceNow().intervalMs,
  (group) => void report(group).catch((error: unknown) => process.stderr.write(`${String(error)}\n`)),
)

const delay = (ms: number): Promise<void> => new Promise((resolve) => setTimeout(resolve, ms))
for (let at = 0; at < neighbours.length; at += DIALED_AT_ONCE) {
  const some = neighbours.slice(at, at + DIALED_AT_ONCE)
  for (const one of some) one.dial(wanted.measured)
  while (some.some(({ isUp }) => !isUp)) await delay(5)
}
process.stdout.write('ready\n')
setInterval(() => {
  const up = neighbours.filter(({ isUp }) => isUp).length
  const figures: LightFigures = { up, ...counts, ticks }
  process.stdout.write(`${JSON.stringify(figures)}\n`)
}, 1_000)
process.stdin.resume()
process.stdin.on('end', () => process.exit(0))
