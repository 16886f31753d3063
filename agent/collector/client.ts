import type { Report } from '@/lib/method/report'
import type {
  AgentProblem,
  Directory,
  EnrolReply,
  EnrolRequest,
  KeyChangeReply,
  KeyChangeRequest,
  LeaveReply,
  LeaveRequest,
  ReportReply,
  ReportRequest,
  SessionReply,
  SessionRequest,
} from '@/lib/protocol'

export type CollectorError =
  /** No answer: the network, the name, the port, TLS. */
  | { code: 'unreachable'; reason: string }
  | { code: 'timeout'; timeoutMs: number }
  /** An answer that is not what a collector says: a proxy, a wrong address, another version. */
  | { code: 'bad-reply'; status: number; issue: string }
  /** The collector says no, and why. */
  | { code: 'refused'; problem: AgentProblem }

export type CollectorResult<T> = { ok: true; value: T } | { ok: false; error: CollectorError }

/** Every agent of the overlay; null where nothing has changed since the etag that was given. */
export interface DirectoryReply {
  etag: string | null
  directory: Directory | null
}

/** A report, and what goes with it. */
export type SentReport = Report & Pick<ReportRequest, 'protocol' | 'wantsReceipt' | 'relayed' | 'away'>

/** What an agent asks of its collector. Never throws; an aborted call answers `unreachable`. */
export interface CollectorClient {
  enrol(request: EnrolRequest, signal: AbortSignal): Promise<CollectorResult<EnrolReply>>
  session(request: SessionRequest, signal: AbortSignal): Promise<CollectorResult<SessionReply>>
  report(request: SentReport, token: string, signal: AbortSignal): Promise<CollectorResult<ReportReply>>
  /** Proves itself: both keys sign. */
  key(request: KeyChangeRequest, signal: AbortSignal): Promise<CollectorResult<KeyChangeReply>>
  leave(request: LeaveRequest, token: string, signal: AbortSignal): Promise<CollectorResult<LeaveReply>>
  directory(etag: string | null, token: string, signal: AbortSignal): Promise<CollectorResult<DirectoryReply>>
}

/** Whether trying the same again can help. */
export function mayRetry(error: CollectorError): boolean {
  return error.code === 'refused' ? error.problem.retry : true
}

/** The collector says that this agent is none of the overlay's any more. */
export function isEnded(error: CollectorError): boolean {
  return error.code === 'refused' && error.problem.code === 'agent-ended'
}

/** One line for logs and people. */
export function describeCollectorError(error: CollectorError): string {
  switch (error.code) {
    case 'unreachable':
      return `the collector cannot be reached: ${error.reason}`
    case 'timeout':
      return `the collector did not answer within ${error.timeoutMs} ms`
    case 'bad-reply':
      return `this is no answer of a collector (status ${error.status}): ${error.issue}`
    case 'refused':
      return `the collector refused (${error.problem.code}): ${error.problem.detail}`
  }
}
