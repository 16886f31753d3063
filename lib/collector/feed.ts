import { noticeSchema, overlayChannel } from './notices'

export type FeedEvent = 'reading' | 'event'

export interface FeedComponents {
  subscribe(channel: string, fn: (payload: string | null) => void, signal: AbortSignal): Promise<void>
}

interface Channel {
  listeners: Set<(event: FeedEvent) => void>
  stop: AbortController
}

/** Who in this process wants to hear of which overlay, over the one listening connection. */
export class Feed {
  readonly #components: FeedComponents
  readonly #channels = new Map<string, Channel>()

  constructor(components: FeedComponents) {
    this.#components = components
  }

  /** Calls `listener` until `signal` aborts. After a lost connection everything counts as new. */
  async listen(overlayId: string, listener: (event: FeedEvent) => void, signal: AbortSignal): Promise<void> {
    if (signal.aborted) return
    const known = this.#channels.get(overlayId)
    const channel = known ?? { listeners: new Set(), stop: new AbortController() }
    channel.listeners.add(listener)
    signal.addEventListener('abort', () => this.#leave(overlayId, channel, listener), { once: true })
    if (known) return
    this.#channels.set(overlayId, channel)
    await this.#components.subscribe(
      overlayChannel(overlayId),
      (payload) => {
        for (const event of eventsIn(payload)) for (const each of channel.listeners) each(event)
      },
      channel.stop.signal,
    )
  }

  #leave(overlayId: string, channel: Channel, listener: (event: FeedEvent) => void): void {
    channel.listeners.delete(listener)
    if (channel.listeners.size > 0) return
    channel.stop.abort()
    if (this.#channels.get(overlayId) === channel) this.#channels.delete(overlayId)
  }
}

function eventsIn(payload: string | null): FeedEvent[] {
  if (payload === null) return ['reading', 'event']
  try {
    const notice = noticeSchema.safeParse(JSON.parse(payload))
    return notice.success ? [notice.data.kind] : []
  } catch {
    return []
  }
}
