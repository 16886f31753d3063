import { createHash } from 'node:crypto'
import type { UpgradeState } from '@/lib/method/report'
import type { UpgradeOffer } from '@/lib/protocol'
import type { Clock } from '../clock'
import type { Post } from '../collector/post'
import type { Logger } from '../logger'
import type { SpawnProgram } from '../sources/program'
import { replaceFile, stageFile, unstageFile } from './replace-file'

export const MAX_PROGRAM_BYTES = 8 * 1024 * 1024
export const DOWNLOAD_TIMEOUT_MS = 60_000
const START_TIMEOUT_MS = 20_000

export interface UpgraderComponents {
  post: Post
  clock: Clock
  runProgram: SpawnProgram
  logger: Logger
}

export interface UpgraderInit {
  collector: string
  /** The file that runs and is replaced; null when the program runs from source. */
  ownFile: string | null
  nodeProgram: string
  /** The version that runs. */
  version: string
  isOn: boolean
  onState: (version: string, state: UpgradeState, error: string | null) => void
  /** The file has been replaced: the program must end, to be started anew. */
  onReplaced: () => void
}

type Attempt = { ok: true } | { ok: false; reason: string }

/** Takes an offered version over where the operator of the node allows it: fetch, compare, try, put in place. */
export class Upgrader {
  private readonly components: UpgraderComponents
  private readonly init: UpgraderInit
  private readonly stopping = new AbortController()
  /** Offers that were dealt with: what failed once is not tried again for the same file. */
  private readonly done = new Set<string>()
  private work: Promise<void> = Promise.resolve()

  constructor(components: UpgraderComponents, init: UpgraderInit) {
    this.components = components
    this.init = init
  }

  /** `offer` has been verified: it is the overlay's. */
  consider(offer: UpgradeOffer): void {
    if (this.done.has(offer.sha256) || offer.version === this.init.version) return
    this.done.add(offer.sha256)
    this.work = this.work.then(() => this.take(offer))
  }

  /** Once every offer so far has been dealt with. */
  settled(): Promise<void> {
    return this.work
  }

  async stop(): Promise<void> {
    this.stopping.abort()
    await this.work
  }

  private async take(offer: UpgradeOffer): Promise<void> {
    const { ownFile, isOn, onState, onReplaced } = this.init
    const { logger } = this.components
    if (this.stopping.signal.aborted) return
    if (!isOn || ownFile === null) {
      const reason = isOn ? 'The program runs from source, not from one file.' : null
      onState(offer.version, 'declined', reason)
      logger.info({ version: offer.version }, 'an offered version is declined')
      return
    }
    onState(offer.version, 'offered', null)
    const result = await this.attempt(offer, ownFile)
    if (this.stopping.signal.aborted && !result.ok) return
    if (!result.ok) {
      onState(offer.version, 'failed', result.reason)
      logger.error({ version: offer.version, reason: result.reason }, 'an offered version was not taken over')
      return
    }
    onState(offer.version, 'taken', null)
    logger.info(
      { version: offer.version },
      'an offered version is in place; the program ends to be started anew',
    )
    onReplaced()
  }

  private async attempt(offer: UpgradeOffer, ownFile: string): Promise<Attempt> {
    const download = await this.download(offer)
    if (!download.ok) return download
    try {
      const staged = await stageFile(ownFile, download.bytes)
      const tried = await this.try(staged, offer.version)
      if (tried.ok) await replaceFile(ownFile, staged)
      else await unstageFile(staged)
      return tried
    } catch (error) {
      return { ok: false, reason: `The file cannot be replaced: ${reasonOf(error)}` }
    }
  }

  private async download({
    path,
    sha256,
  }: UpgradeOffer): Promise<{ ok: true; bytes: Buffer } | { ok: false; reason: string }> {
    const { post, clock } = this.components
    const abort = new AbortController()
    const onAbort = () => abort.abort()
    const cancel = clock.after(DOWNLOAD_TIMEOUT_MS, onAbort)
    this.stopping.signal.addEventListener('abort', onAbort, { once: true })
    try {
      // Below the collector's own address, however the path is written.
      const { collector } = this.init
      const url = new URL(`.${path}`, collector.endsWith('/') ? collector : `${collector}/`)
      const reply = await post(url, {
        method: 'GET',
        headers: { accept: 'text/javascript' },
        body: '',
        signal: abort.signal,
        maxReplyBytes: MAX_PROGRAM_BYTES,
      })
      if (reply.status !== 200)
        return { ok: false, reason: `The download answered with status ${reply.status}.` }
      if (reply.text === null)
        return { ok: false, reason: `The file has more than ${MAX_PROGRAM_BYTES} bytes.` }
      const bytes = Buffer.from(reply.text, 'utf8')
      const found = createHash('sha256').update(bytes).digest('hex')
      if (found === sha256) return { ok: true, bytes }
      return { ok: false, reason: `The file is not the one offered: its SHA-256 is ${found}.` }
    } catch (error) {
      return { ok: false, reason: `The download failed: ${reasonOf(error)}` }
    } finally {
      cancel()
      this.stopping.signal.removeEventListener('abort', onAbort)
    }
  }

  /** It must start on this machine's Node and say the version that was offered. */
  private async try(file: string, version: string): Promise<Attempt> {
    const limits = { timeoutMs: START_TIMEOUT_MS, maxOutputBytes: 4_096, signal: this.stopping.signal }
    const result = await this.components.runProgram([this.init.nodeProgram, file, '--version'], limits)
    if (!result.ok) return { ok: false, reason: `The new program does not start: ${result.reason}` }
    const said = result.output.trim()
    return said === version
      ? { ok: true }
      : { ok: false, reason: `The new program says that it is "${said}".` }
  }
}

const reasonOf = (error: unknown): string => (error instanceof Error ? error.message : String(error))
