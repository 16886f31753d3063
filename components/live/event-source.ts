/** A browser gives up on a stream that was refused: this long and it is tried again. */
export const REOPEN_MS = 10_000

export interface StreamHandlers {
  /** Whether the stream is open now. */
  onOpen: (open: boolean) => void
  /** By event name: the data as text. */
  on: Readonly<Record<string, (data: unknown) => void>>
}

/** Keeps one event stream open until the signal aborts. */
export function keepEventSource(url: string, handlers: StreamHandlers, signal: AbortSignal): void {
  const source = new EventSource(url)
  let reopen: ReturnType<typeof setTimeout> | null = null

  source.addEventListener('open', () => handlers.onOpen(true))
  source.addEventListener('error', () => {
    handlers.onOpen(false)
    if (source.readyState !== EventSource.CLOSED || signal.aborted) return
    reopen = setTimeout(() => keepEventSource(url, handlers, signal), REOPEN_MS)
  })
  for (const [name, handle] of Object.entries(handlers.on)) {
    source.addEventListener(name, (event) => handle(event.data))
  }
  signal.addEventListener('abort', () => {
    source.close()
    if (reopen) clearTimeout(reopen)
  })
}
