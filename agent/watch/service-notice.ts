import { type Clock, sleep } from '../clock'
import type { Logger } from '../logger'
import type { SpawnProgram } from '../sources/program'
import { STUCK_AFTER_MS } from './facts'

const NOTIFY_TIMEOUT_MS = 5_000
/** systemd advises to notify at half the watchdog's time (sd_watchdog_enabled(3)). */
const WATCHDOG_SHARE = 0.5

export interface ServiceNoticeComponents {
  runProgram: SpawnProgram
  clock: Clock
  logger: Logger
  tickAgeMs: () => number
}

export interface ServiceNoticeInit {
  /** How long the service manager waits for a sign of life; null where it does not watch. */
  watchdogMs: number | null
}

/**
 * Tells the service manager that the agent is ready, lives, or stops (sd_notify(3)). Node has no datagram sockets of
 * the kind it listens on, so systemd's own program is run: every half watchdog time, which at 30 s costs next to nothing.
 */
export class ServiceNotice {
  private readonly components: ServiceNoticeComponents
  private readonly init: ServiceNoticeInit
  private stopping: AbortController | null = null
  private loop: Promise<void> = Promise.resolve()
  private hasFailed = false

  constructor(components: ServiceNoticeComponents, init: ServiceNoticeInit) {
    this.components = components
    this.init = init
  }

  start(): void {
    if (this.stopping) return
    this.stopping = new AbortController()
    this.loop = this.run(this.stopping.signal)
  }

  async stop(): Promise<void> {
    if (!this.stopping) return
    this.stopping.abort()
    await this.loop
    await this.notify('STOPPING=1')
    this.stopping = null
  }

  private async run(signal: AbortSignal): Promise<void> {
    const { clock, tickAgeMs, logger } = this.components
    await this.notify('READY=1')
    const { watchdogMs } = this.init
    if (watchdogMs === null) return
    while (!signal.aborted) {
      const ageMs = tickAgeMs()
      // An agent that answers but does not tick is no agent: being started anew is what helps.
      if (ageMs <= STUCK_AFTER_MS) await this.notify('WATCHDOG=1')
      else
        logger.error(
          { tickAgeMs: Math.round(ageMs) },
          'no tick came: the service manager is not told that all is well',
        )
      await sleep(clock, watchdogMs * WATCHDOG_SHARE, signal)
    }
  }

  private async notify(message: string): Promise<void> {
    const { runProgram, logger } = this.components
    const { signal } = new AbortController()
    const limits = { timeoutMs: NOTIFY_TIMEOUT_MS, maxOutputBytes: 4_096, signal }
    const result = await runProgram(['systemd-notify', message], limits)
    if (!result.ok && !this.hasFailed)
      logger.warn(
        { reason: result.reason },
        'the service manager could not be told: is systemd-notify there?',
      )
    this.hasFailed = !result.ok
  }
}
