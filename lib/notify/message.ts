import type { Severity } from '@/lib/warn/rule'

export const MESSAGE_KINDS = [
  'raised',
  /** Nobody has it: the next in the call order. */
  'next',
  /** Something graver has joined it. */
  'graver',
  'taken',
  'cleared',
  'resolved',
  'reopened',
  'test',
] as const
export type MessageKind = (typeof MESSAGE_KINDS)[number]

export const MESSAGE_STATES = ['waiting', 'sending', 'sent', 'failed', 'dropped'] as const
export type MessageState = (typeof MESSAGE_STATES)[number]

export const ATTEMPT_OUTCOMES = ['sent', 'again', 'failed', 'unknown'] as const
export type AttemptOutcome = (typeof ATTEMPT_OUTCOMES)[number]

/** What a message says, as it was when it was written: the same for every channel. */
export interface MessageBody {
  at: string
  /** Null in a test message. */
  incident: { id: string; number: number; severity: Severity; sentence: string; raisedAt: string } | null
  overlay: { slug: string; name: string } | null
  team: { slug: string; name: string }
  /** Why this person hears of it now, in a sentence. */
  because: string
  /** Further facts, a sentence each. */
  details: string[]
  /** Who has it, by name. */
  holder: string | null
}
