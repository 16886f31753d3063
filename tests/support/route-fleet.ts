import { randomBytes } from 'node:crypto'
import type { Server } from 'node:http'
import type { AddressInfo } from 'node:net'
import { createClock, createHttpCollector, createPost, createWsTransport, silentLogger } from '@/agent'
import { AGENT_ROUTES } from '@/app/api/agent/routes'
import { createRouteServer } from '@/lib/collector/http-server'
import { createRandom } from '@/lib/method/random'
import { createFleet, type Fleet, type FleetInit } from '@/scripts/fleet/fleet'

export interface RouteFleet {
  fleet: Fleet
  /** What the agents ask. */
  server: Server
  close(): Promise<void>
}

/** Real agents on real sockets, whose collector is the routes of this process, served on loopback. */
export async function startRouteFleet(seed: string, init: FleetInit): Promise<RouteFleet> {
  const clock = createClock({ monotonicMs: () => performance.now(), epochMs: () => Date.now() })
  const server = createRouteServer(AGENT_ROUTES)
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve))
  const { port } = server.address() as AddressInfo
  const fleet = createFleet(
    {
      transport: createWsTransport({ clock }),
      collector: createHttpCollector({ post: createPost(), clock }, { baseUrl: `http://127.0.0.1:${port}` }),
      clockOf: () => clock,
      clock,
      random: createRandom(seed),
      randomBytes,
      logger: silentLogger,
    },
    init,
  )
  const close = async () => {
    await fleet.stop()
    server.closeAllConnections()
    await new Promise((resolve) => server.close(resolve))
  }
  try {
    await fleet.start()
  } catch (error) {
    await close()
    throw error
  }
  return { fleet, server, close }
}
