/** Three nodes in a ring, each with an agent inside: THINSPAN_COLLECTOR and THINSPAN_CODE say where they join. */
import { randomBytes } from 'node:crypto'
import { createClock, createHttpCollector, createPost, silentLogger } from '../../agent'
import { createRandom } from '../../lib/method/random'
import { generateKeys } from '../../lib/protocol'
import { measure } from './measured-node'
import { OverlayNode } from './overlay-node'

const NAMES = ['tar-01', 'gul-04', 'pin-02']
const HOST = '127.0.0.1'

async function main(collector: string, code: string): Promise<void> {
  const stopping = new AbortController()
  for (const name of ['SIGINT', 'SIGTERM'] as const) process.once(name, () => stopping.abort())
  const clock = createClock({ monotonicMs: () => performance.now(), epochMs: () => Date.now() })
  const client = createHttpCollector({ post: createPost(), clock }, { baseUrl: collector })
  const nodes = NAMES.map((name) => new OverlayNode({ name, host: HOST, port: 0 }))
  const ports = await Promise.all(nodes.map((node) => node.start()))
  const agents = await Promise.all(
    nodes.map((node) =>
      measure(
        node,
        {
          collector: client,
          clock,
          random: createRandom(randomBytes(16).toString('hex')),
          randomBytes,
          logger: silentLogger,
          keys: generateKeys(),
        },
        { code, labels: { example: 'embedding' }, version: 'example' },
        stopping.signal,
      ),
    ),
  )
  nodes.forEach((node, index) => {
    const next = (index + 1) % nodes.length
    node.connect(HOST, ports[next] ?? 0)
  })
  console.log(`${NAMES.join(', ')} are linked in a ring. Ctrl-C ends them.`)
  await new Promise((resolve) => stopping.signal.addEventListener('abort', resolve))
  await Promise.all(agents.map((agent) => agent.stop()))
  for (const node of nodes) node.stop()
}

const { THINSPAN_COLLECTOR, THINSPAN_CODE } = process.env
if (!THINSPAN_COLLECTOR || !THINSPAN_CODE) {
  console.error(
    'Set THINSPAN_COLLECTOR to the server’s address and THINSPAN_CODE to a joining code for three agents.',
  )
  process.exitCode = 2
} else await main(THINSPAN_COLLECTOR, THINSPAN_CODE)
