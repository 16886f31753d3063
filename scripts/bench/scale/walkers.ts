/**
 * Simulated agents in a process of their own: real walkers of 200 nodes in real time, frames carried in memory after a delay,
 * reports sent over HTTP as agents send them. A larger overlay is the same 200 nodes told again under other names, each with
 * its own session: sums are then those of so many separate copies that walk alike. Takes one line of JSON, prints one.
 */
import { z } from 'zod'
import { createPost } from '@/agent/collector/post'
import { edgesOf } from '@/lib/method/graph'
import { randomRegular } from '@/lib/method/graphs'
import { WalkNode } from '@/lib/method/node'
import { PACE_NAMES, PACES } from '@/lib/method/pace'
import { createRandom, forkRandom } from '@/lib/method/random'
import { parseOrders, reportReplySchema } from '@/lib/protocol'
import { delay, doJobs } from '../server/job'

const DEGREE = 8
const LINK_DELAY_MS = [20, 300] as const
/** Orders are on time while they are no older than the round that is due and half of one. */
const ORDERS_LATE_INTERVALS = 1.5
const MOST_REPLY_BYTES = 2 * 1024 * 1024

const jobSchema = z.object({
  url: z.url(),
  pace: z.enum(PACE_NAMES),
  /** Walked for real. */
  nodes: z.number().int(),
  /** A multiple of `nodes`. */
  agents: z.array(z.object({ agentId: z.string(), token: z.string() })),
  warmUpSeconds: z.number(),
  seconds: z.number(),
})
export type WalkersJob = z.infer<typeof jobSchema>

export const walkersResultSchema = z.object({
  /** Reports that were due in the time measured. */
  due: z.number(),
  answeredWithinInterval: z.number(),
  failed: z.number(),
  /** One of them, where there were any. */
  failure: z.string().nullable(),
  p50Ms: z.number(),
  p99Ms: z.number(),
  ordersOnTime: z.number(),
  oldestOrdersMs: z.number(),
})
export type WalkersResult = z.infer<typeof walkersResultSchema>

async function run(job: WalkersJob): Promise<WalkersResult> {
  const { tickMs, intervalMs } = PACES[job.pace]
  const random = createRandom(`bench scale ${job.agents.length}`)
  const post = createPost()
  const url = new URL('/api/agent/report', job.url)
  const copies = job.agents.length / job.nodes
  const nodes = Array.from({ length: job.nodes }, (_, index) => {
    const init = { agentId: job.agents[index]?.agentId ?? '', incarnation: `of-the-bench-${index}` }
    return new WalkNode({ random: forkRandom(random, index) }, { ...init, audits: false, weights: 'unit' })
  })
  const byId = new Map(nodes.map((node) => [node.agentId, node]))
  for (const [a, b] of edgesOf(randomRegular(job.nodes, DEGREE, random))) {
    const [one, other] = [nodes[a], nodes[b]]
    if (!one || !other) continue
    one.addLink(other.agentId, other.incarnation, performance.now())
    other.addLink(one.agentId, one.incarnation, performance.now())
  }
  const result = { due: 0, within: 0, failed: 0, onTime: 0, oldestOrdersMs: 0 }
  const times: number[] = []
  let failure: string | null = null
  let isMeasured = false
  const stopping = new AbortController()
  const { signal } = stopping
  const timers = new Set<NodeJS.Timeout>()
  const later = (ms: number, work: () => void) => {
    const timer = setTimeout(() => {
      timers.delete(timer)
      work()
    }, ms)
    timers.add(timer)
  }
  const every = (ms: number, work: () => void) => {
    const again = (dueAtMs: number) =>
      later(dueAtMs - performance.now(), () => {
        work()
        again(dueAtMs + ms)
      })
    again(performance.now() + ms * random.uniform())
  }

  const tick = (node: WalkNode) => {
    for (const { peer, frame } of node.tick(performance.now()))
      later(LINK_DELAY_MS[0] + random.uniform() * (LINK_DELAY_MS[1] - LINK_DELAY_MS[0]), () =>
        byId.get(peer)?.receive(node.agentId, node.incarnation, frame, performance.now()),
      )
  }

  const send = async (node: WalkNode, token: string, body: string, isFirst: boolean) => {
    const dueAtMs = performance.now()
    const counts = isMeasured
    if (counts) result.due += 1
    try {
      const reply = await post(url, {
        headers: { 'content-type': 'application/json', authorization: `Bearer ${token}` },
        body,
        signal,
        maxReplyBytes: MOST_REPLY_BYTES,
      })
      const tookMs = performance.now() - dueAtMs
      if (reply.status !== 200 || reply.text === null)
        throw new Error(`${reply.status} ${reply.text?.slice(0, 200)}`)
      const { signedOrders, ordersAgeMs } = reportReplySchema.parse(JSON.parse(reply.text))
      if (counts) {
        times.push(tookMs)
        if (tookMs <= intervalMs) result.within += 1
        if (ordersAgeMs <= ORDERS_LATE_INTERVALS * intervalMs) result.onTime += 1
        result.oldestOrdersMs = Math.max(result.oldestOrdersMs, ordersAgeMs)
      }
      if (!isFirst || !signedOrders) return
      const orders = parseOrders(new TextEncoder().encode(signedOrders.text))
      if (orders.ok) node.adopt(orders.orders, ordersAgeMs + tookMs / 2, performance.now())
    } catch (error) {
      if (!counts || signal.aborted) return
      result.failed += 1
      failure ??= String(error)
    }
  }

  const report = (node: WalkNode, index: number) => {
    const facts = { linksKnown: DEGREE, version: '0.1.0', uptimeSeconds: performance.now() / 1000 }
    const body = JSON.stringify({ ...node.report(performance.now(), facts), protocol: 2 })
    for (let copy = 0; copy < copies; copy++) {
      const token = job.agents[index + copy * job.nodes]?.token ?? ''
      // The copies one after the other: agents do not report all at once.
      later((copy * intervalMs) / copies, () => void send(node, token, body, copy === 0))
    }
  }

  for (const [index, node] of nodes.entries()) {
    every(tickMs, () => tick(node))
    every(intervalMs, () => report(node, index))
  }
  await delay(job.warmUpSeconds)
  process.stdout.write('measuring\n')
  isMeasured = true
  await delay(job.seconds)
  isMeasured = false
  // What is under way may still be answered within its interval.
  await delay(intervalMs / 1000)
  stopping.abort()
  for (const timer of timers) clearTimeout(timer)
  times.sort((a, b) => a - b)
  const at = (share: number): number => times[Math.floor(share * (times.length - 1))] ?? 0
  return {
    due: result.due,
    answeredWithinInterval: result.within / result.due,
    failed: result.failed,
    failure,
    p50Ms: at(0.5),
    p99Ms: at(0.99),
    ordersOnTime: result.onTime / Math.max(1, times.length),
    oldestOrdersMs: result.oldestOrdersMs,
  }
}

if (process.argv[1] === import.meta.filename) await doJobs(jobSchema, run)
