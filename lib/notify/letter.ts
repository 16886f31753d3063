import type { ChannelKind } from './channel'
import type { AttemptOutcome, MessageBody, MessageKind } from './message'

export type WayKind = ChannelKind | 'webhook'

/** One message as it is handed to what sends it. */
export interface Letter {
  /** The idempotency key: the same at each attempt. */
  id: string
  kind: MessageKind
  body: MessageBody
  /** What its line began with: the subject of an incident's mails stays as it was in the first. */
  firstSentence: string | null
  /** An earlier attempt may have arrived: it ended without an answer. */
  mayBeRepeat: boolean
  /** Of this attempt. */
  at: Date
}

export interface WebhookTarget {
  url: string
  /** All of them sign: two while one replaces the other. */
  secrets: readonly string[]
}

export interface Answer {
  outcome: AttemptOutcome
  /** What the other side said, or why there was nothing; a sentence for a person. */
  answer: string
  retryAfterMs?: number
  /** The receiver wants nothing more from us. */
  isGone?: boolean
}

/** Each sends one letter, ends soon after `signal` aborts, and never throws what it knows how to say. */
export interface Ways {
  /** Whether this process can send this way at all; where not, each letter is answered with what is missing. */
  isSetUp(way: WayKind): boolean
  email(address: string, letter: Letter, signal: AbortSignal): Promise<Answer>
  sms(number: string, letter: Letter, signal: AbortSignal): Promise<Answer>
  webhook(target: WebhookTarget, letter: Letter, signal: AbortSignal): Promise<Answer>
}

/** What others answer goes into tables and logs: one line, no control characters, not long. */
export function plainAnswer(text: string): string {
  return text
    .replace(/[\p{Cc}\p{Cf}\s]+/gu, ' ')
    .trim()
    .slice(0, 500)
}
