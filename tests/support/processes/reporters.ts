import { setTimeout as delay } from 'node:timers/promises'
import type { Member } from '../collector'
import { someReport } from '../reports'
import { Bell } from '../until'
import { postReport, type ReportAnswer } from './report-client'

const PATIENCE_MS = 5_000
/** Between reports, as between retries. */
const PAUSE_MS = 25

export interface ReporterState {
  member: Member
  /** The highest numbers that were sent, and answered with 200. */
  sent: number
  answered: number
}

/**
 * Agents that report as soon as they are answered. Of those that are not, every other one tells the same again, and the
 * rest tell the next report in its place, as counters are cumulative.
 */
export class Reporters {
  readonly states: readonly ReporterState[]
  /** Answers other than 200, in order. */
  readonly refusals: ReportAnswer[] = []
  /** Answers that said that the report was there already. */
  repeated = 0
  url: string
  readonly #stopping = new AbortController()
  readonly #bell = new Bell()
  #running: Promise<unknown> = Promise.resolve()

  constructor(members: readonly Member[], init: { url: string }) {
    this.states = members.map((member) => ({ member, sent: 0, answered: 0 }))
    this.url = init.url
  }

  start(): void {
    this.#running = Promise.all(this.states.map((state, index) => this.#run(state, index % 2 === 0)))
  }

  async stop(): Promise<void> {
    this.#stopping.abort()
    await this.#running
  }

  /** Until `wanted` holds; looked at with every answer. */
  until(wanted: () => boolean): Promise<void> {
    return this.#bell.until(wanted, { explain: () => this.#told() })
  }

  #told(): string {
    const states = this.states.map(({ member, sent, answered }) => `${member.name} ${answered} of ${sent}`)
    return [...states, ...this.refusals.slice(-3).map((refusal) => JSON.stringify(refusal))].join('\n')
  }

  /** Until every agent has been answered `count` times more. */
  async answers(count: number): Promise<void> {
    const wanted = this.states.map(({ answered }) => answered + count)
    await this.until(() => this.states.every(({ answered }, index) => answered >= (wanted[index] ?? 0)))
  }

  async #run(state: ReporterState, retries: boolean): Promise<void> {
    const { signal } = this.#stopping
    while (!signal.aborted) {
      if (!retries || state.sent === state.answered) state.sent += 1
      const number = state.sent
      const answer = await postReport(
        this.url,
        state.member.token,
        someReport(number),
        AbortSignal.any([signal, AbortSignal.timeout(PATIENCE_MS)]),
      ).catch(() => null)
      if (answer?.status === 200) {
        state.answered = number
        if (isRepeated(answer.body)) this.repeated += 1
      } else if (answer) this.refusals.push(answer)
      this.#bell.ring()
      await delay(PAUSE_MS)
    }
  }
}

function isRepeated(body: unknown): boolean {
  return typeof body === 'object' && body !== null && 'repeated' in body
}
