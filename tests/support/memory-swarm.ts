import { randomBytes } from 'node:crypto'
import { MemoryNetwork, silentLogger } from '@/agent'
import { createRandom, type Random } from '@/lib/method/random'
import { parseEdgeList } from '@/lib/topology'
import { createFleet, type Fleet, type FleetInit } from '@/scripts/fleet/fleet'
import { FakeClock } from './fake-clock'
import { TestCollector, type TestCollectorInit } from './test-collector'
import { within } from './until'

export interface Swarm {
  clock: FakeClock
  collector: TestCollector
  fleet: Fleet
  network: MemoryNetwork
  /** Sets an agent's wall clock forward, or back. */
  stepWall(name: string, ms: number): void
  /** An agent's program stands still: its timers fire late and what arrives waits. */
  stall(name: string, ms: number): void
  stop(): Promise<void>
}

export interface SwarmInit extends TestCollectorInit {
  /** Edge list as CSV. */
  edges: string
  seed: string
  /** How wrong an agent's clock is. */
  offsetMs?: (name: string, random: Random) => number
  fleet?: Pick<FleetInit, 'spoolOf' | 'onUpgradeOffer' | 'onEnded'>
}

/** A fleet on a fake clock over memory, with a collector in the same process. */
export async function memorySwarm(init: SwarmInit): Promise<Swarm> {
  const topology = parseEdgeList(init.edges)
  if (!topology.ok) throw new Error(JSON.stringify(topology.problems))
  const clock = new FakeClock({ epochMs: Date.UTC(2031, 4, 6, 12) })
  const random = createRandom(init.seed)
  const collector = new TestCollector({ clock, random: createRandom(`${init.seed} collector`) }, init)
  const stalledUntilMs = new Map<string, number>()
  const stillMs = (name: string) => Math.max(0, (stalledUntilMs.get(name) ?? 0) - clock.monotonicMs())
  const stepsMs = new Map<string, number>()
  const network = new MemoryNetwork(
    { clock },
    { weather: ({ to }) => [stillMs(to) + 0.5 + 2 * random.uniform()] },
  )
  const fleet = createFleet(
    {
      transport: network.transport('fleet'),
      transportOf: (name) => network.transport(name),
      collector,
      clockOf: (name, own) => {
        const offsetMs = init.offsetMs?.(name, own) ?? 0
        return {
          monotonicMs: () => clock.monotonicMs(),
          epochMs: () => clock.epochMs() + offsetMs + (stepsMs.get(name) ?? 0),
          after: (ms, run) => {
            let cancel = clock.after(ms, function fire() {
              const lateMs = stillMs(name)
              if (lateMs > 0) cancel = clock.after(lateMs, fire)
              else run()
            })
            return () => cancel()
          },
        }
      },
      clock,
      random,
      randomBytes,
      logger: silentLogger,
    },
    { topology: topology.graph, code: collector.code, ...init.fleet },
  )
  collector.start()
  return {
    clock,
    collector,
    fleet,
    network,
    stepWall: (name, ms) => void stepsMs.set(name, (stepsMs.get(name) ?? 0) + ms),
    stall: (name, ms) => void stalledUntilMs.set(name, clock.monotonicMs() + ms),
    stop: async () => {
      collector.stop()
      await during(clock, fleet.stop())
    },
  }
}

/** Moves a fake clock on for as long as something takes. */
export async function during<T>(clock: FakeClock, work: Promise<T>): Promise<T> {
  let isOver = false
  const outcome = work.finally(() => {
    isOver = true
  })
  outcome.catch(() => {})
  const moving = async () => {
    while (!isOver) await clock.advance(10)
  }
  await within('what a fake clock was moved on for', moving(), {
    explain: () => `It is ${clock.monotonicMs()} ms.`,
  })
  return outcome
}
