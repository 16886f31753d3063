import {
  generateKeys,
  type KeyChangeRequest,
  type KeyPair,
  keyChangeText,
  type PassGrant,
  signText,
} from '@/lib/protocol'
import { type Clock, sleep } from '../clock'
import { type CollectorClient, type CollectorError, mayRetry } from '../collector/client'

/** Between two attempts to learn whether the collector took a key. */
export const KEY_RETRY_MS = 5_000
export const KEY_RETRIES = 5

export interface KeyChange {
  /** Pending: the collector is about to be asked, and may take it without the answer arriving. In force: it did. */
  state: 'pending' | 'in-force'
  keys: KeyPair
}

export type RotationError =
  /** Nothing was asked: the key could not be kept first. */
  | { code: 'not-kept'; reason: string }
  /** The collector said no, and the old key stays. */
  | { code: 'not-taken'; error: CollectorError }
  /** Whether the collector took it is not known; the pending key is kept and tried first by the next rotation. */
  | { code: 'unanswered'; error: CollectorError }

export type RotationResult =
  | { ok: true; keys: KeyPair; grant: PassGrant }
  | { ok: false; error: RotationError }

export interface OwnKeysComponents {
  collector: CollectorClient
  clock: Clock
  randomBytes: (count: number) => Uint8Array
  /** The collector's time. */
  nowMs: () => number
}

export interface OwnKeysInit {
  agentId: string
  keys: KeyPair
  /** Of a rotation that was not finished before the last stop. */
  pending?: KeyPair
  /** Keeps a key. Waited for: a key that is in force and was not kept would lock the agent out. */
  onKey?: (change: KeyChange) => void | Promise<void>
}

/** The agent's own key pair, and how another takes its place. */
export class OwnKeys {
  private readonly components: OwnKeysComponents
  private readonly init: OwnKeysInit
  private keys: KeyPair
  private next: KeyPair | null
  private running: Promise<RotationResult> | null = null

  constructor(components: OwnKeysComponents, init: OwnKeysInit) {
    this.components = components
    this.init = init
    this.keys = init.keys
    this.next = init.pending ?? null
  }

  get current(): KeyPair {
    return this.keys
  }

  /** A key waits for the collector, and nobody is asking just now. */
  get isUnfinished(): boolean {
    return this.next !== null && this.running === null
  }

  /** A key that the collector has taken or is to take, on somebody else's asking: the next rotation is to it. */
  offer(keys: KeyPair): void {
    if (keys.publicKey !== this.keys.publicKey) this.next = keys
  }

  /** Finishes a rotation that is pending, else makes a new key. Asking twice for the same key is harmless. */
  rotate(signal: AbortSignal, retries = KEY_RETRIES): Promise<RotationResult> {
    this.running ??= this.run(signal, retries).finally(() => {
      this.running = null
    })
    return this.running
  }

  private async run(signal: AbortSignal, retries: number): Promise<RotationResult> {
    const next = this.next ?? generateKeys()
    if (this.next === null) {
      const reason = await this.keep({ state: 'pending', keys: next })
      if (reason !== null) return { ok: false, error: { code: 'not-kept', reason } }
      this.next = next
    }
    const asked = await this.ask(next, signal, retries)
    if (!asked.ok) return asked
    this.keys = next
    this.next = null
    // It stays pending in the configuration where this fails, and is taken up from there by the next start.
    await this.keep({ state: 'in-force', keys: next })
    return { ok: true, keys: next, grant: asked.grant }
  }

  private async keep(change: KeyChange): Promise<string | null> {
    try {
      await this.init.onKey?.(change)
      return null
    } catch (error) {
      return error instanceof Error ? error.message : String(error)
    }
  }

  private async ask(
    next: KeyPair,
    signal: AbortSignal,
    retries: number,
  ): Promise<{ ok: true; grant: PassGrant } | { ok: false; error: RotationError }> {
    const { collector, clock } = this.components
    for (let attempt = 0; ; attempt++) {
      const result = await collector.key(this.request(next), signal)
      if (result.ok) return { ok: true, grant: result.value }
      if (result.error.code === 'refused' && !mayRetry(result.error)) {
        this.next = null
        return { ok: false, error: { code: 'not-taken', error: result.error } }
      }
      const isOver = attempt >= retries || !(await sleep(clock, KEY_RETRY_MS, signal))
      if (isOver) return { ok: false, error: { code: 'unanswered', error: result.error } }
    }
  }

  private request(next: KeyPair): KeyChangeRequest {
    const { randomBytes, nowMs } = this.components
    const statement = {
      agentId: this.init.agentId,
      publicKey: next.publicKey,
      at: new Date(nowMs()).toISOString(),
      nonce: Buffer.from(randomBytes(16)).toString('base64url'),
    }
    const text = keyChangeText(statement)
    return {
      ...statement,
      signature: signText(this.keys.privateKey, text),
      newSignature: signText(next.privateKey, text),
    }
  }
}
