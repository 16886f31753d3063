/**
 * npm run collector: takes agents' reports and leads overlays in a process of its own, beside any number of others on
 * the same database. PORT (default 3100), HOST (default 127.0.0.1), DATABASE_URL. Composition root.
 */
import { once } from 'node:events'
import { resolve } from 'node:path'
import { GET as agentFacts } from '@/app/agent/thinspan-agent.json/route'
import { GET as agentFile } from '@/app/agent/thinspan-agent.mjs/route'
import { AGENT_ROUTES } from '@/app/api/agent/routes'
import { createRouteServer } from '@/lib/collector/http-server'
import { getIngest, startLeader } from '@/lib/collector/process'
import { closeDatabase, sql, switchOffIdleStorages } from '@/lib/db'
import { authorise } from '@/lib/http/call'
import { processSignal, stopProcess } from '@/lib/http/process-signal'
import { route } from '@/lib/http/route'
import { untilStorable } from '@/lib/http/start-server'
import { startJobs } from '@/lib/jobs/process'
import { startSender } from '@/lib/notify/process'
import { startWatch } from '@/lib/warn/process'
import { dataFolderOf, findOwnDatabase } from './lib/own-database.mjs'

// Or every promise would cost more from the first transaction on, and reports are taken in by many.
switchOffIdleStorages()
// Beside a running `npm start` it needs no address.
process.env.DATABASE_URL ||=
  findOwnDatabase(dataFolderOf(process.env, resolve(import.meta.dirname, '..'))) ?? ''
const port = Number(process.env.PORT || 3100)
const host = process.env.HOST || '127.0.0.1'

for (const name of ['SIGTERM', 'SIGINT'] as const) process.once(name, () => stopProcess(`received ${name}`))

/** The web process's route comes with the web framework. */
const health = route('health.read', {}, async (call) => {
  authorise(call, 'health.read')
  await sql(call.em, 'select 1')
  return { status: 'ok', at: call.now.toISOString() }
})

const server = createRouteServer({
  ...AGENT_ROUTES,
  'GET /agent/thinspan-agent.mjs': agentFile,
  'GET /agent/thinspan-agent.json': agentFacts,
  'GET /api/health': health,
})
await untilStorable()
server.listen(port, host)
await once(server, 'listening')
const leader = startLeader(processSignal())
const jobs = startJobs(processSignal())
const sender = startSender(processSignal())
const watch = startWatch(processSignal())
const address = server.address()
const listening = typeof address === 'object' && address ? address.port : port
process.stdout.write(`Collector listens on http://${host}:${listening}\n`)

await new Promise<void>((resolve) =>
  processSignal().addEventListener('abort', () => resolve(), { once: true }),
)
server.close()
server.closeIdleConnections()
await getIngest().stop()
await leader.stop()
await jobs.stop()
await watch.stop()
await sender.stop()
await closeDatabase()
server.closeAllConnections()
