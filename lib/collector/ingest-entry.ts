import type { AgentCaller } from '@/lib/auth/caller'
import { AppError } from '@/lib/http/app-error'
import type { Report } from '@/lib/method/report'
import type { AwaySummary, ReportReply, SignedReport } from '@/lib/protocol'
import { agentEnded } from './agent-proof'
import type { Sender, SessionSender } from './ingest-store'

export interface Answer extends ReportReply {
  /** Nothing was stored: a report as new or newer was there already. */
  repeated?: true
}

/** A report as it comes in, with what goes with it since version 2. */
export type Incoming = Report & {
  protocol?: number
  wantsReceipt?: boolean
  relayed?: readonly SignedReport[]
  away?: readonly AwaySummary[]
}

/** One request, on its way to its answer. */
export interface Entry {
  tokenHash: string
  request: Incoming
  caller: PromiseWithResolvers<AgentCaller>
  answer: PromiseWithResolvers<Answer>
}

/** An entry whose sender may report. */
export interface Admitted {
  entry: Entry
  sender: SessionSender
}

/** One report to be judged and stored: the sender's own, or one that it delivers for another. */
export interface Arrival {
  sender: Sender
  report: Report
  relayed: boolean
  /** What became of it; null while that is not known. */
  outcome: { kind: 'stored' | 'repeated' } | { kind: 'refused'; error: unknown } | null
}

/** @returns null where the entry has been refused */
export function admit(entry: Entry, sender: SessionSender | undefined): SessionSender | null {
  const refusal = whyNot(sender)
  if (refusal || !sender) {
    refuse(entry, refusal)
    return null
  }
  const { agentId, overlayId, teamId, name } = sender
  entry.caller.resolve({ kind: 'agent', agentId, overlayId, teamId, name })
  return sender
}

/** Why nothing is done for whoever holds a session token; null where there is no reason. */
export function whyNot(sender: SessionSender | undefined): AppError | null {
  if (!sender) return new AppError('bad-token', 'The session token is not known. Open a session first.')
  if (sender.expired) return new AppError('session-expired', 'Open a new session and try again.')
  return mayReport(sender) ? null : agentEnded()
}

/** One that was left out goes on reporting, so that it can be readmitted. */
export function mayReport({ state }: Pick<Sender, 'state'>): boolean {
  return state === 'joined' || state === 'left-out'
}

export function refuse(entry: Entry, error: unknown): void {
  entry.caller.reject(error)
  entry.answer.reject(error)
}

export interface PromiseWithResolvers<T> {
  promise: Promise<T>
  resolve(value: T): void
  reject(reason: unknown): void
}

export function withResolvers<T>(): PromiseWithResolvers<T> {
  let resolve: (value: T) => void = () => {}
  let reject: (reason: unknown) => void = () => {}
  const promise = new Promise<T>((res, rej) => {
    resolve = res
    reject = rej
  })
  return { promise, resolve, reject }
}
