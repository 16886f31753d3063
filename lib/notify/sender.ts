import { type Clock, sleep } from '@/lib/collector/clock'
import type { EntityManager } from '@/lib/db'
import type { ListenFunction } from '@/lib/db/listener'
import type { Log } from '@/lib/http/runtime'
import type { Answer, Letter, WayKind, Ways } from './letter'
import { OUTBOX_CHANNEL } from './outbox'
import { pulse } from './pulse'
import { nextDelayMs, PERSON_DELAYS_MS, WEBHOOK_DELAYS_MS } from './schedule'
import { type Claim, claim, lookAhead, type Outcome, record } from './sender-store'

export const WAY_KINDS: readonly WayKind[] = ['email', 'sms', 'webhook']

export interface SenderLimits {
  /** Letters under way at once, of each way: what hangs in one must not hold up the others. */
  perWay: number
  /** To one address: lines of several incidents lead to the same one. */
  perDestination: number
  /** An attempt without an answer is given up then. Standard Webhooks 1.0 recommends 15 to 30 s. */
  answerMs: number
  /** So long after its beginning whoever made an attempt is taken for gone. */
  leaseMs: number
  /** The longest between two looks. */
  idleMs: number
  /** After the database could not be reached. */
  retryMs: number
  /** What is under way when it is told to stop gets this long. */
  stopMs: number
  /** What is due and waits longer than that means that sending is stuck, and no sign of life is given. */
  overdueMs: number
}

export const SENDER_LIMITS: SenderLimits = {
  perWay: 12,
  perDestination: 2,
  answerMs: 15_000,
  leaseMs: 60_000,
  idleMs: 15_000,
  retryMs: 1_000,
  stopMs: 4_000,
  overdueMs: 120_000,
}

/** A way that does not end although it was told to is left behind after this. */
const ABANDON_MS = 1_000
/** Others may be set up for what this process is not: so long they have it to themselves. */
export const LEFT_TO_OTHERS_MS = 60_000
/** Where something is due and every place is taken; a place that becomes free wakes at once. */
const CROWDED_MS = 1_000

export interface SenderComponents {
  forkEm(): Promise<EntityManager>
  subscribe(channel: string, fn: ListenFunction, signal: AbortSignal): Promise<void>
  clock: Clock
  /** Uniform in [0, 1). */
  random(): number
  log: Log
  ways: Ways
}

interface UnderWay {
  claim: Claim
  startedAtMs: number
  done: Promise<void>
}

/** Sends what is in the outbox, as one of any number of processes that do. */
export class Sender {
  readonly #components: SenderComponents
  readonly #limits: SenderLimits
  readonly #underWay = new Set<UnderWay>()
  #stopping = new AbortController()
  #ending = new AbortController()
  #resting = new AbortController()
  #running: Promise<void> | null = null

  constructor(components: SenderComponents, limits: Partial<SenderLimits> = {}) {
    this.#components = components
    this.#limits = { ...SENDER_LIMITS, ...limits }
  }

  start(): void {
    if (this.#running) return
    this.#stopping = new AbortController()
    this.#ending = new AbortController()
    this.#running = this.#run(this.#stopping.signal)
  }

  /** Takes nothing more, and gives what is under way a moment to end. */
  async stop(): Promise<void> {
    const { clock } = this.#components
    this.#stopping.abort()
    await this.#running
    this.#running = null
    if (this.#underWay.size === 0) return
    const cancel = clock.after(this.#limits.stopMs, () => this.#ending.abort())
    await Promise.all([...this.#underWay].map(({ done }) => done))
    cancel()
  }

  async #run(signal: AbortSignal): Promise<void> {
    const { subscribe, clock, log } = this.#components
    await subscribe(OUTBOX_CHANNEL, () => this.#wake(), signal)
    while (!signal.aborted) {
      this.#resting = new AbortController()
      let waitMs = this.#limits.retryMs
      try {
        waitMs = await this.#look(signal)
      } catch (error) {
        if (!signal.aborted) log.warn({ err: error }, 'the outbox cannot be read at the moment')
      }
      await sleep(clock, waitMs, AbortSignal.any([signal, this.#resting.signal]))
    }
  }

  #wake(): void {
    this.#resting.abort()
  }

  /** Takes what is due. @returns how long there is nothing to do */
  async #look(signal: AbortSignal): Promise<number> {
    const { forkEm } = this.#components
    for (const way of WAY_KINDS) while (!signal.aborted && (await this.#takeOne(way))) {}
    const em = await forkEm()
    const now = this.#now()
    const ahead = await lookAhead(em, now)
    const overdueMs = ahead.overdueSinceMs === null ? 0 : now.getTime() - ahead.overdueSinceMs
    if (!this.#isStuck() && overdueMs <= this.#limits.overdueMs) await pulse(em, 'sending', now)
    const untilNextMs = ahead.nextAtMs === null ? Infinity : ahead.nextAtMs - now.getTime()
    const crowdedMs = ahead.overdueSinceMs === null ? Infinity : CROWDED_MS
    return Math.max(1, Math.min(untilNextMs, crowdedMs, this.#limits.idleMs))
  }

  /** Something is under way for longer than anything may be: the other limits do not hold. */
  #isStuck(): boolean {
    const nowMs = this.#components.clock.monotonicMs()
    return [...this.#underWay].some(({ startedAtMs }) => nowMs - startedAtMs >= this.#limits.leaseMs)
  }

  async #takeOne(way: WayKind): Promise<boolean> {
    const { perWay, perDestination, leaseMs } = this.#limits
    const mine = [...this.#underWay].filter(({ claim }) => claim.way === way)
    if (mine.length >= perWay) return false
    const counts = new Map<string, number>()
    for (const { claim } of mine) counts.set(claim.destinationId, (counts.get(claim.destinationId) ?? 0) + 1)
    const busy = [...counts].filter(([, count]) => count >= perDestination).map(([id]) => id)
    const now = this.#now()
    const leaseUntil = new Date(now.getTime() + leaseMs)
    const leftMs = this.#components.ways.isSetUp(way) ? 0 : LEFT_TO_OTHERS_MS
    const dueBy = new Date(now.getTime() - leftMs)
    const taken = await claim(await this.#components.forkEm(), { way, busy, now, dueBy, leaseUntil })
    if (!taken) return false
    const startedAtMs = this.#components.clock.monotonicMs()
    const underWay: UnderWay = { claim: taken, startedAtMs, done: Promise.resolve() }
    this.#underWay.add(underWay)
    underWay.done = this.#send(taken, startedAtMs).finally(() => {
      this.#underWay.delete(underWay)
      this.#wake()
    })
    return true
  }

  async #send(taken: Claim, startedAtMs: number): Promise<void> {
    const { clock, log, random, forkEm } = this.#components
    const answer = await this.#answerTo(taken)
    const outcome = outcomeOf(taken, answer, { nowMs: clock.epochMs(), random: random() })
    const { id, way, attempt } = taken
    log.info({ message: id, way, attempt, outcome: answer.outcome }, 'a message was sent for')
    // The answer is only known here: it is kept for as long as nobody else takes the message over.
    while (clock.monotonicMs() - startedAtMs < this.#limits.leaseMs) {
      try {
        if (!(await record(await forkEm(), taken, outcome, this.#now())))
          log.warn({ message: id, attempt }, 'a message was taken over before its answer came')
        return
      } catch (error) {
        log.warn({ err: error, message: id }, 'an answer cannot be recorded at the moment')
        await sleep(clock, this.#limits.retryMs, this.#ending.signal)
        if (this.#ending.signal.aborted) return
      }
    }
  }

  async #answerTo(taken: Claim): Promise<Answer> {
    const { clock } = this.#components
    const giveUp = new AbortController()
    const cancels = [clock.after(this.#limits.answerMs, () => giveUp.abort())]
    const signal = AbortSignal.any([giveUp.signal, this.#ending.signal])
    const abandoned = new Promise<Answer>((resolve) => {
      const abandon = () =>
        cancels.push(
          clock.after(ABANDON_MS, () =>
            resolve({ outcome: 'unknown', answer: 'It did not end in time, and may have arrived.' }),
          ),
        )
      signal.addEventListener('abort', abandon, { once: true })
    })
    try {
      return await Promise.race([this.#deliver(taken, signal), abandoned])
    } catch (error) {
      this.#components.log.error({ err: error, message: taken.id }, 'a way of sending failed')
      return { outcome: 'unknown', answer: 'The server failed while it was sending this: see its log.' }
    } finally {
      for (const cancel of cancels) cancel()
    }
  }

  async #deliver(taken: Claim, signal: AbortSignal): Promise<Answer> {
    const { ways } = this.#components
    const { id, kind, body, firstSentence, mayBeRepeat, way, address, url, secrets } = taken
    const letter: Letter = { id, kind, body, firstSentence, mayBeRepeat, at: this.#now() }
    if (taken.isOn === false)
      return { outcome: 'failed', answer: 'Not sent: the channel was turned off before its time came.' }
    if (taken.disabled !== null)
      return { outcome: 'failed', answer: `Not sent: the webhook is turned off. ${taken.disabled}` }
    if (way === 'webhook') return ways.webhook({ url: url ?? '', secrets }, letter, signal)
    return ways[way](address ?? '', letter, signal)
  }

  #now(): Date {
    return new Date(this.#components.clock.epochMs())
  }
}

/** What becomes of a message after an attempt. */
export function outcomeOf(
  { way, tries, isOn }: Pick<Claim, 'way' | 'tries' | 'isOn'>,
  answer: Answer,
  { nowMs, random }: { nowMs: number; random: number },
): Outcome {
  if (answer.outcome === 'sent') return { answer, state: 'sent', dueAt: null }
  if (answer.outcome === 'failed')
    return { answer, state: isOn === false ? 'dropped' : 'failed', dueAt: null }
  const delays = way === 'webhook' ? WEBHOOK_DELAYS_MS : PERSON_DELAYS_MS
  const delayMs = nextDelayMs(delays, { made: tries, random, retryAfterMs: answer.retryAfterMs })
  if (delayMs !== null) return { answer, state: 'waiting', dueAt: new Date(nowMs + delayMs) }
  const last = { ...answer, answer: `${answer.answer} That was the last try: send it again by hand.` }
  return { answer: last, state: 'failed', dueAt: null }
}
