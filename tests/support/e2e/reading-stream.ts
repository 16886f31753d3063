import { type Reading, readingSchema } from '@/lib/data/dto'
import type { readStream } from '../streams'
import { PATIENCE_MS, within } from '../until'

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
    deadlineMs = PATIENCE_MS,
  ): Promise<Reading> {
    const look = async () => {
      for (;;) {
        const reading = await this.next()
        if (wanted(reading)) return reading
      }
    }
    return within(what, look(), {
      patienceMs: deadlineMs,
      explain: async () =>
        `Last readings:\n${this.seen.slice(-TOLD).map(inOneLine).join('\n')}\n${await explain()}`,
    })
  }
}

/** A reading as a person would want it in a failure. */
export function inOneLine(reading: Reading): string {
  const { at, lambda2, low, high, data, level, crossingLinks, coverage, verdict } = reading
  const value = lambda2 === null ? 'withheld' : `${lambda2.toPrecision(4)} (${low} to ${high})`
  const heard = `heard ${coverage.heard}/${coverage.joined}, links ${coverage.linksMeasured}/${coverage.linksKnown}`
  return `${at} ${value} ${data} ${level} crossing ${crossingLinks} ${heard} ${verdict}`
}
