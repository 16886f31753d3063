import { setTimeout as delay } from 'node:timers/promises'
import { expect, vi } from 'vitest'

/** Whatever takes longer hangs: many times what a busy machine makes of it, and less than a test may take. */
export const PATIENCE_MS = 120_000
const LOOK_EVERY_MS = 20

export type Look = () => boolean | Promise<boolean>

export interface Patience {
  patienceMs?: number
  /** What else is to be said of a wait that was in vain. */
  explain?: () => string | Promise<string>
}

/** @throws where `work` is not over in time, with what was being waited for */
export async function within<T>(what: string, work: Promise<T>, patience: Patience = {}): Promise<T> {
  const { patienceMs = PATIENCE_MS, explain } = patience
  const late = Symbol('late')
  const stopping = new AbortController()
  try {
    const deadline = delay(patienceMs, late, { signal: stopping.signal, ref: false })
    deadline.catch(() => undefined)
    const outcome = await Promise.race([work, deadline])
    if (outcome !== late) return outcome
  } finally {
    stopping.abort()
  }
  const more = await explain?.()
  throw new Error([`Not within ${patienceMs / 1000} s: ${what}`, ...(more ? [more] : [])].join('\n'))
}

/** Looks again and again until it is so. @throws after a while, with the condition as it is written */
export async function until(isSo: Look, patience: Patience = {}): Promise<void> {
  let isOver = false
  const look = async () => {
    while (!isOver && !(await isSo())) await delay(LOOK_EVERY_MS)
  }
  await within(String(isSo), look(), patience).finally(() => {
    isOver = true
  })
}

/** Something that happens now and then, and that all conditions waited for here change with. */
export class Bell {
  readonly #waiting = new Set<() => void>()

  ring(): void {
    const woken = [...this.#waiting]
    this.#waiting.clear()
    for (const wake of woken) wake()
  }

  /** Looks now and whenever it rings, also where it rings during a look. @throws as `until` does */
  async until(isSo: Look, patience: Patience = {}): Promise<void> {
    let isOver = false
    const look = async () => {
      while (!isOver) {
        const rung = new Promise<void>((resolve) => this.#waiting.add(resolve))
        if (await isSo()) return
        await rung
      }
    }
    await within(String(isSo), look(), patience).finally(() => {
      isOver = true
    })
  }
}

/** What is true of something that goes on changing, such as a list asked for anew: looks until it holds, else fails as it did last. */
export function eventually<T>(look: () => T | Promise<T>): Promise<T> {
  return vi.waitFor(look, { timeout: PATIENCE_MS, interval: LOOK_EVERY_MS })
}

/** As `toMatchObject`, to be waited for. */
export function isLike(actual: unknown, expected: object): boolean {
  try {
    expect(actual).toMatchObject(expected)
    return true
  } catch {
    return false
  }
}
