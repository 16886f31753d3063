/** Takes agents' reports in at one address. Composition root. */
import { once } from 'node:events'
import { GET as agentFacts } from '@/app/agent/thinspan-agent.json/route'
import { GET as agentFile } from '@/app/agent/thinspan-agent.mjs/route'
import { AGENT_ROUTES } from '@/app/api/agent/routes'
import { createRouteServer } from '@/lib/collector/http-server'
import { getIngest } from '@/lib/collector/process'
import { sql } from '@/lib/db'
import { authorise } from '@/lib/http/call'
import { route } from '@/lib/http/route'

export interface Intake {
  port: number
  /** What is under way is stored and answered; nothing new is taken in. */
  stop(): Promise<void>
  /** Ends connections whose answers have been given. */
  hangUp(): void
}

/** The web process's route comes with the web framework. */
const health = route('health.read', {}, async (call) => {
  authorise(call, 'health.read')
  await sql(call.em, 'select 1')
  return { status: 'ok', at: call.now.toISOString() }
})

/** @throws where the port cannot be listened on */
export async function openIntake(at: { port: number; host: string }): Promise<Intake> {
  const server = createRouteServer({
    ...AGENT_ROUTES,
    'GET /agent/thinspan-agent.mjs': agentFile,
    'GET /agent/thinspan-agent.json': agentFacts,
    'GET /api/health': health,
  })
  server.listen(at.port, at.host)
  await once(server, 'listening')
  const address = server.address()
  return {
    port: typeof address === 'object' && address ? address.port : at.port,
    async stop() {
      server.close()
      server.closeIdleConnections()
      await getIngest().stop()
    },
    hangUp: () => server.closeAllConnections(),
  }
}
