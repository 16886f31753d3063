/** Lines that are obeyed one after the other. */
export class LineQueue {
  private readonly obey: (line: string) => Promise<void>
  private last = Promise.resolve()
  private isClosed = false

  constructor({ obey }: { obey: (line: string) => Promise<void> }) {
    this.obey = obey
  }

  /** Empty lines are nothing. */
  push(line: string): void {
    if (line.trim() === '') return
    this.last = this.last.then(() => (this.isClosed ? undefined : this.obey(line)))
  }

  /** Lines that wait are dropped. @returns once the one under way is over */
  close(): Promise<void> {
    this.isClosed = true
    return this.last
  }
}
