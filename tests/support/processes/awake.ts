const TICK_MS = 25
/** A tick that comes later than this was held up, and so was everything else here. */
const TICK_MOST_MS = 100

/**
 * The time that the machine gave: what passes while it stands still, or has no turn for a program that asks for hardly
 * any, does not count. So a limit of some seconds is one for the programs under test and not for whatever runs beside.
 */
export class Awake {
  readonly #ticksMs: number[] = []
  #timer: NodeJS.Timeout | undefined

  start(): void {
    this.#ticksMs.push(Date.now())
    this.#timer = setInterval(() => this.#ticksMs.push(Date.now()), TICK_MS)
  }

  stop(): void {
    clearInterval(this.#timer)
  }

  /** Between two moments, milliseconds since 1970. */
  msBetween(fromMs: number, toMs: number): number {
    return awakeMs(this.#ticksMs, fromMs, toMs)
  }
}

/** What lies before the first tick or after the last one counts in full. */
export function awakeMs(ticksMs: readonly number[], fromMs: number, toMs: number): number {
  let lostMs = 0
  for (const [index, tickMs] of ticksMs.entries()) {
    const heldUpFromMs = Math.max(fromMs, (ticksMs[index - 1] ?? tickMs) + TICK_MOST_MS)
    lostMs += Math.max(0, Math.min(toMs, tickMs) - heldUpFromMs)
  }
  return toMs - fromMs - lostMs
}
