import type { Clock } from '@/agent'

/** Waits for conditions that change only when something happens, and is told when it does. */
export class Waiters {
  private readonly clock: Clock
  private readonly waiting = new Set<() => void>()

  constructor({ clock }: { clock: Clock }) {
    this.clock = clock
  }

  /** Something happened: those that wait look again. */
  look(): void {
    for (const check of [...this.waiting]) check()
  }

  /** @throws Error with `otherwise` where the time runs out, or with the signal's reason where it aborts */
  until(
    done: () => boolean,
    limitMs: number,
    otherwise: string | (() => string),
    signal: AbortSignal,
  ): Promise<void> {
    if (signal.aborted) return Promise.reject(signal.reason)
    if (done()) return Promise.resolve()
    return new Promise((resolve, reject) => {
      const leave = () => {
        this.waiting.delete(check)
        cancel()
        signal.removeEventListener('abort', onAbort)
      }
      const onAbort = () => {
        leave()
        reject(signal.reason)
      }
      const cancel = this.clock.after(limitMs, () => {
        leave()
        reject(new Error(typeof otherwise === 'string' ? otherwise : otherwise()))
      })
      const check = () => {
        if (!done()) return
        leave()
        resolve()
      }
      this.waiting.add(check)
      signal.addEventListener('abort', onAbort, { once: true })
    })
  }
}
