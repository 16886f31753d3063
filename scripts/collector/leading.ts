/** All that one process does for overlays beside taking reports in. Composition root. */
import { startLeader } from '@/lib/collector/process'
import { startJobs } from '@/lib/jobs/process'
import { startSender } from '@/lib/notify/process'
import { startWatch } from '@/lib/warn/process'

/** Leads overlays, runs jobs, evaluates rules and sends messages; each begins to end on `signal`. */
export function startLeading(signal: AbortSignal): { stop(): Promise<void> } {
  const leader = startLeader(signal)
  const jobs = startJobs(signal)
  const sender = startSender(signal)
  const watch = startWatch(signal)
  return {
    async stop() {
      await leader.stop()
      await jobs.stop()
      await watch.stop()
      await sender.stop()
    },
  }
}
