import { randomBytes } from 'node:crypto'
import type { Server } from 'node:http'
import type { AddressInfo } from 'node:net'
import { createClock, createHttpCollector, createPost, createWsTransport, silentLogger } from '@/agent'
import { GET as directory } from '@/app/api/agent/directory/route'
import { POST as enrol } from '@/app/api/agent/enrol/route'
import { POST as key } from '@/app/api/agent/key/route'
import { POST as leave } from '@/app/api/agent/leave/route'
import { POST as report } from '@/app/api/agent/report/route'
import { POST as session } from '@/app/api/agent/session/route'
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
  const server = createRouteServer({
    'POST /api/agent/enrol': enrol,
    'POST /api/agent/session': session,
    'POST /api/agent/report': report,
    'POST /api/agent/key': key,
    'POST /api/agent/leave': leave,
    'GET /api/agent/directory': directory,
  })
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
