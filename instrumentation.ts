/** Runs once per server process before the first request. */
export async function register(): Promise<void> {
  if (process.env.NEXT_RUNTIME !== 'nodejs') return
  const { startServer } = await import('./lib/http/start-server')
  await startServer()
  const { offerAgentFile } = await import('./lib/http/agent-release')
  await offerAgentFile()
  const { processSignal } = await import('./lib/http/process-signal')
  const { startLeader } = await import('./lib/collector/process')
  startLeader(processSignal())
  const { startJobs } = await import('./lib/jobs/process')
  startJobs(processSignal())
  const { startSender } = await import('./lib/notify/process')
  startSender(processSignal())
}
