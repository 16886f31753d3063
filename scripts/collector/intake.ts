/** Takes agents' reports in at one address. Composition root. */
import { once } from 'node:events'
import type { ServerResponse } from 'node:http'
import { GET as agentFacts } from '@/app/agent/thinspan-agent.json/route'
import { GET as agentFile } from '@/app/agent/thinspan-agent.mjs/route'
import { AGENT_ROUTES } from '@/app/api/agent/routes'
import { createRouteServer } from '@/lib/collector/http-server'
import { getIngest } from '@/lib/collector/process'
import { sql } from '@/lib/db'
import { authorise } from '@/lib/http/call'
import { route } from '@/lib/http/route'

/** Requests under way are waited for as long as this: longer than any statement that is not stuck. */
const STOP_MS = 8_000

export interface Intake {
  /** What is under way is stored and answered; nothing new is taken in, and each connection ends with its answer. */
  stop(): Promise<void>
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
  const underWay = new Set<ServerResponse>()
  server.prependListener('request', (_request, response) => {
    underWay.add(response)
    response.once('close', () => underWay.delete(response))
    // One that came on a connection that was still open.
    if (!server.listening) endWith(response)
  })
  server.listen(at.port, at.host)
  await once(server, 'listening')
  return {
    async stop() {
      const closed = new Promise<void>((settle) => server.close(() => settle()))
      server.closeIdleConnections()
      for (const response of underWay) endWith(response)
      const timer = setTimeout(() => server.closeAllConnections(), STOP_MS)
      await closed
      clearTimeout(timer)
      await getIngest().stop()
    },
  }
}

/** The answer says that its connection ends with it. */
function endWith(response: ServerResponse): void {
  if (!response.headersSent) response.setHeader('connection', 'close')
}
