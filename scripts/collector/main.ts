/**
 * The collector's program, in the process that leads and in each that takes reports in: so they hold one another up less.
 * Composition root.
 */
import cluster from 'node:cluster'
import { systemClock } from '@/lib/collector/process'
import { closeDatabase, switchOffIdleStorages } from '@/lib/db'
import { processSignal, stopProcess } from '@/lib/http/process-signal'
import { getRuntime } from '@/lib/http/runtime'
import { untilStorable } from '@/lib/http/start-server'
import { requirePort, tryPort } from '../lib/ports.mjs'
import { IntakeProcesses } from './intake-processes'
import { processesWanted } from './processes-wanted'

// Or every promise would cost more from the first transaction on, and reports are taken in by many.
switchOffIdleStorages()
const port = Number(process.env.PORT || 3100)
const host = process.env.HOST || '127.0.0.1'

// As often as they come: whoever ends the whole group ends those that take reports in twice, and that must not cut them short.
for (const name of ['SIGTERM', 'SIGINT'] as const) process.on(name, () => stopProcess(`received ${name}`))
const signal = processSignal()
const stopped = new Promise<void>((settle) =>
  signal.addEventListener('abort', () => settle(), { once: true }),
)

try {
  if (cluster.isWorker) await takeIn()
  else await lead()
} catch (error) {
  process.stderr.write(`${error instanceof Error ? error.message : error}\n`)
  process.exit(1)
}

/** Ends at once when the process that leads has ended, as node's cluster has it: what was not answered is sent again. */
async function takeIn(): Promise<void> {
  const { openIntake } = await import('./intake')
  await untilStorable()
  const intake = await openIntake({ port, host })
  await stopped
  await intake.stop()
  await closeDatabase()
  process.exit(0)
}

async function lead(): Promise<void> {
  const { startLeading } = await import('./leading')
  const { log } = getRuntime()
  const count = processesWanted(process.env)
  if (port !== 0) await requirePort(port, host, 'npm run collector')
  await untilStorable()
  // Any free one must be the same for all, and for those that come later.
  const shared = { PORT: String(port || ((await tryPort(0, host)) ?? 0)) }
  const processes = new IntakeProcesses(
    { fork: () => cluster.fork(shared), log, after: systemClock.after },
    {
      count,
      onFailure(error) {
        log.error({ err: error }, 'ending, so that whoever supervises the collector starts it anew')
        process.exitCode = 1
        stopProcess(error.message)
      },
    },
  )
  const stopping = stopped.then(() => processes.stop())
  const listening = await processes.start().catch((error: unknown) => {
    // Told to end meanwhile, it has nothing to say.
    if (!signal.aborted) throw error
    return null
  })
  if (listening !== null && !signal.aborted) {
    const leading = startLeading(signal)
    process.stdout.write(`Collector listens on http://${host}:${listening}\n`)
    await stopped
    await leading.stop()
  }
  await stopping
  await closeDatabase()
}
