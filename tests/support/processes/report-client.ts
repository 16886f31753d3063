import { z } from 'zod'
import { type ReportReply, reportReplySchema } from '@/lib/protocol'

/** A collector that does not answer within this is passed over for the next. */
const PATIENCE_MS = 800

export interface ReportAnswer {
  status: number
  retryAfter: string | null
  /** Of a problem. */
  code: string | null
  body: unknown
}

const answerSchema = z.looseObject({ code: z.string().optional() })

/** @throws where nothing answers */
export async function postReport(
  url: string,
  token: string,
  report: unknown,
  signal: AbortSignal = AbortSignal.timeout(PATIENCE_MS),
): Promise<ReportAnswer> {
  const response = await fetch(`${url}/api/agent/report`, {
    method: 'POST',
    headers: { authorization: `Bearer ${token}`, 'content-type': 'application/json' },
    body: JSON.stringify(report),
    signal,
  })
  const body: unknown = await response.json()
  const retryAfter = response.headers.get('retry-after')
  return { status: response.status, retryAfter, code: answerSchema.parse(body).code ?? null, body }
}

/** Tells one of several collectors, the one that answered last before the others, as a balancer in front would. */
export class ReportClient {
  /** In the order in which they are asked. */
  urls: readonly string[]

  constructor(urls: readonly string[]) {
    this.urls = urls
  }

  /** @throws where none takes the report */
  async send(token: string, report: unknown): Promise<ReportReply> {
    let problem: unknown = new Error('There is no collector to ask.')
    for (const url of this.urls) {
      try {
        const { status, body } = await postReport(url, token, report)
        if (status === 200) {
          this.urls = [url, ...this.urls.filter((other) => other !== url)]
          return reportReplySchema.parse(body)
        }
        problem = new Error(`Status ${status}: ${JSON.stringify(body)}`)
      } catch (error) {
        problem = error
      }
    }
    throw problem
  }
}
