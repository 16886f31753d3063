import { type Reading, readingSchema } from '@/lib/data/dto'
import type { readStream } from '../streams'

export const DEADLINE_MS = 90_000
const TOLD = 8

/** The readings of an event stream, in the order they come. */
export class ReadingStream {
  /** All that came, oldest first. */
  readonly seen: Reading[] = []
  readonly close: () => void
  readonly #stream: ReturnType<typeof readStream>

  constructor(stream: ReturnType<typeof readStream>, close: () => void) {
    this.#stream = stream
    this.close = close
  }

  async next(): Promise<Reading> {
    for (;;) {
      const message = await this.#stream.next()
      if (message === null) throw new Error('The event stream has ended.')
      if (message.event !== 'reading') continue
      const reading = readingSchema.parse(message.data)
      this.seen.push(reading)
      return reading
    }
  }

  /**
   * The first reading from now on that is as wanted.
   * @throws after `deadlineMs`, with the last readings and what `explain` says of them
   */
  async until(
    what: string,
    wanted: (reading: Reading) => boolean,
    explain: () => string | Promise<string> = () => '',
    deadlineMs = DEADLINE_MS,
  ): Promise<Reading> {
    const late = Symbol('late')
    let timer: ReturnType<typeof setTimeout> | undefined
    const deadline = new Promise<typeof late>((resolve) => {
      timer = setTimeout(() => resolve(late), deadlineMs)
    })
    try {
      for (;;) {
        const reading = await Promise.race([this.next(), deadline])
        if (reading === late) break
        if (wanted(reading)) return reading
      }
    } finally {
      clearTimeout(timer)
    }
    const last = this.seen.slice(-TOLD).map(inOneLine).join('\n')
    throw new Error(
      `Not within ${deadlineMs / 1000} s: ${what}.\nLast readings:\n${last}\n${await explain()}`,
    )
  }
}

/** A reading as a person would want it in a failure. */
export function inOneLine(reading: Reading): string {
  const { at, lambda2, low, high, data, level, crossingLinks, coverage, verdict } = reading
  const value = lambda2 === null ? 'withheld' : `${lambda2.toPrecision(4)} (${low} to ${high})`
  const heard = `heard ${coverage.heard}/${coverage.joined}, links ${coverage.linksMeasured}/${coverage.linksKnown}`
  return `${at} ${value} ${data} ${level} crossing ${crossingLinks} ${heard} ${verdict}`
}
