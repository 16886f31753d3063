/** The example of a program with an agent inside it, as the Joining page shows it. */
import { randomBytes } from 'node:crypto'
import { readFileSync } from 'node:fs'
import { afterEach, expect, test } from 'vitest'
import { createClock, silentLogger } from '@/agent'
import { measure } from '@/examples/embedding/measured-node'
import { OverlayNode } from '@/examples/embedding/overlay-node'
import { partMarked } from '@/lib/face/example-part'
import { createRandom } from '@/lib/method/random'
import { generateKeys } from '@/lib/protocol'
import { Child } from '@/tests/support/e2e/child'
import { serve, TestCollector } from '@/tests/support/test-collector'
import { within } from '@/tests/support/until'

const clock = createClock({ monotonicMs: () => performance.now(), epochMs: () => Date.now() })
const stops: (() => unknown)[] = []
afterEach(async () => {
  for (const stop of stops.splice(0).reverse()) await stop()
})

function collector(): TestCollector {
  const made = new TestCollector({ clock, random: createRandom('embedding') }, { weights: 'unit' })
  made.start()
  stops.push(() => made.stop())
  return made
}

/** The first estimate from now on that is near enough. */
function reads(from: TestCollector, lambda2: number): Promise<void> {
  const near = new Promise<void>((resolve) => {
    from.onEstimate = (estimate) => {
      if (estimate.lambda2 !== null && Math.abs(estimate.lambda2 / lambda2 - 1) < 0.05) resolve()
    }
  })
  return within(`an estimate near ${lambda2}`, near, { explain: () => JSON.stringify(from.estimate) })
}

test('frames ride on the overlay’s own connections, whose loss is the link’s', async () => {
  const made = collector()
  const stopping = new AbortController()
  const nodes = ['tar-01', 'gul-04', 'pin-02'].map(
    (name) => new OverlayNode({ name, host: '127.0.0.1', port: 0 }),
  )
  stops.push(() => {
    for (const node of nodes) node.stop()
  })
  const ports = await Promise.all(nodes.map((node) => node.start()))
  const agents = await Promise.all(
    nodes.map((node) =>
      measure(
        node,
        {
          collector: made,
          clock,
          random: createRandom(node.name),
          randomBytes,
          logger: silentLogger,
          keys: generateKeys(),
        },
        { code: made.code, labels: {}, version: 'test' },
        stopping.signal,
      ),
    ),
  )
  stops.push(() => Promise.all(agents.map((agent) => agent.stop())))
  const [tar, gul, pin] = nodes
  if (!tar || !gul || !pin) throw new Error('unreachable')
  tar.connect('127.0.0.1', ports[1] ?? 0)
  gul.connect('127.0.0.1', ports[2] ?? 0)
  pin.connect('127.0.0.1', ports[0] ?? 0)
  // The spectrum of a triangle is 0, 3, 3; of a path of three 0, 1, 3.
  await reads(made, 3)
  expect(tar.neighbours).toEqual(['gul-04', 'pin-02'])
  const told = new Promise<void>((resolve) =>
    gul.watch({ message: (_, channel) => channel === 1 && resolve() }),
  )
  tar.tellTide(431)
  await within('the tide is told', told)
  expect(gul.tides.get('tar-01')).toBe(431)
  tar.disconnect('gul-04')
  await reads(made, 1)
  expect(tar.neighbours).toEqual(['pin-02'])
  tar.connect('127.0.0.1', ports[1] ?? 0)
  await reads(made, 3)
})

test('the program joins three agents to an overlay', async () => {
  const made = collector()
  const { url, close } = await serve(made)
  stops.push(close)
  const program = new Child(process.execPath, ['--import', 'tsx', 'examples/embedding/main.ts'], {
    env: { THINSPAN_COLLECTOR: url, THINSPAN_CODE: made.code },
  })
  stops.push(() => program.stop())
  const outcome = await Promise.race([reads(made, 3).then(() => 'reads 3'), program.end])
  expect(`${outcome}\n${program.tail()}`).toMatch(/^reads 3\n/)
})

test('the page shows the parts that matter, and nothing of what stands around them', () => {
  const shown = (name: string) => partMarked(readFileSync(`examples/embedding/${name}`, 'utf8'))
  expect(shown('frames-over.ts')).toMatch(/^const OPEN = 0[\s\S]*export function framesOver[\s\S]*\}$/)
  expect(shown('measured-node.ts')).toMatch(/^\/\*\* Enrols the node[\s\S]*\}$/)
  expect(`${shown('frames-over.ts')}${shown('measured-node.ts')}`).not.toContain('shown ')
})
