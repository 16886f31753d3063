import type { Report } from '@/lib/method/report'
import type {
  AgentProblem,
  EnrolReply,
  EnrolRequest,
  ReportReply,
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

/** What an agent asks of its collector. Never throws; an aborted call answers `unreachable`. */
export interface CollectorClient {
  enrol(request: EnrolRequest, signal: AbortSignal): Promise<CollectorResult<EnrolReply>>
  session(request: SessionRequest, signal: AbortSignal): Promise<CollectorResult<SessionReply>>
  report(report: Report, token: string, signal: AbortSignal): Promise<CollectorResult<ReportReply>>
}

/** Whether trying the same again can help. */
export function mayRetry(error: CollectorError): boolean {
  return error.code === 'refused' ? error.problem.retry : true
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
