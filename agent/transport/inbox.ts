import type { CloseEvent, ConnectionListener } from './transport'

/** Keeps what arrives until someone listens, so that nothing is lost between opening and attaching. */
export class Inbox {
  private listener: ConnectionListener | null = null
  private readonly waiting: Uint8Array[] = []
  private end: CloseEvent | null = null

  attach(listener: ConnectionListener): void {
    this.listener = listener
    for (const bytes of this.waiting.splice(0)) listener.message(bytes)
    if (this.end) listener.closed(this.end)
  }

  message(bytes: Uint8Array): void {
    if (this.end) return
    if (this.listener) this.listener.message(bytes)
    else this.waiting.push(bytes)
  }

  closed(event: CloseEvent): void {
    if (this.end) return
    this.end = event
    this.listener?.closed(event)
  }
}
