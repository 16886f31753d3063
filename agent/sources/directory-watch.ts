import type { Directory } from '@/lib/protocol'
import { type Clock, sleep } from '../clock'
import { type CollectorResult, type DirectoryReply, describeCollectorError } from '../collector/client'

/** Between two looks at the directory, and after one that failed. */
export const DIRECTORY_EVERY_MS = 180_000
export const DIRECTORY_RETRY_MS = 15_000

export type FetchDirectory = (
  etag: string | null,
  signal: AbortSignal,
) => Promise<CollectorResult<DirectoryReply>>

export interface DirectoryWatchInit {
  onDirectory: (directory: Directory) => void
  onFailure: (reason: string) => void
}

/** Keeps the overlay's directory of agents at hand, always whole: what is looked up in it nobody learns. */
export class DirectoryWatch {
  private readonly clock: Clock
  private readonly fetch: FetchDirectory
  private readonly init: DirectoryWatchInit
  private stopping: AbortController | null = null
  private loop: Promise<void> = Promise.resolve()

  constructor({ clock, fetch }: { clock: Clock; fetch: FetchDirectory }, init: DirectoryWatchInit) {
    this.clock = clock
    this.fetch = fetch
    this.init = init
  }

  start(): void {
    if (this.stopping) return
    this.stopping = new AbortController()
    this.loop = this.run(this.stopping.signal)
  }

  async stop(): Promise<void> {
    this.stopping?.abort()
    await this.loop
    this.stopping = null
  }

  private async run(signal: AbortSignal): Promise<void> {
    let etag: string | null = null
    while (!signal.aborted) {
      const result = await this.fetch(etag, signal)
      if (signal.aborted) return
      if (result.ok) {
        etag = result.value.etag
        if (result.value.directory) this.init.onDirectory(result.value.directory)
      } else this.init.onFailure(describeCollectorError(result.error))
      await sleep(this.clock, result.ok ? DIRECTORY_EVERY_MS : DIRECTORY_RETRY_MS, signal)
    }
  }
}
