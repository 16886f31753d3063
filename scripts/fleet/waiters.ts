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

  /** @throws Error with `otherwise` where the time runs out */
  until(done: () => boolean, limitMs: number, otherwise: string | (() => string)): Promise<void> {
    if (done()) return Promise.resolve()
    return new Promise((resolve, reject) => {
      const cancel = this.clock.after(limitMs, () => {
        this.waiting.delete(check)
        reject(new Error(typeof otherwise === 'string' ? otherwise : otherwise()))
      })
      const check = () => {
        if (!done()) return
        this.waiting.delete(check)
        cancel()
        resolve()
      }
      this.waiting.add(check)
    })
  }
}
