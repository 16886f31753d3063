'use client'

import { useEvents } from '@/components/live/hooks'
import { FailedState, Sheet, Time, Waiting } from '@/components/ui'
import { EventMark } from './event-mark'

/** What changed, newest first. */
export function LastHourSheet({ slug }: { slug: string }) {
  const events = useEvents(slug)
  const items = [...(events.data ?? [])].sort((p, q) => (p.at < q.at ? 1 : -1))
  return (
    <Sheet heading="Last hour" aside={items.length > 0 ? `${items.length} in all` : null}>
      {events.data ? (
        items.length > 0 ? (
          // biome-ignore lint/a11y/noNoninteractiveTabindex: a scrolling region must be reachable by keyboard
          <ul tabIndex={0} aria-label="Events of the last hour" className="relative max-h-96 overflow-y-auto">
            {items.map((e) => (
              <li key={e.id} className="flex gap-x-3 border-b border-hairline py-2">
                <span className="shrink-0 font-figures text-soft">
                  <Time at={e.at} show="moment" />
                </span>
                <span className="shrink-0">
                  <EventMark kind={e.kind} />
                </span>
                <span className="min-w-0 break-words">{e.text}</span>
              </li>
            ))}
          </ul>
        ) : (
          <p className="text-soft">Nothing changed in the last hour.</p>
        )
      ) : events.error ? (
        <FailedState quiet title="The last hour could not be loaded." onRetry={events.retry}>
          {events.error.message}
        </FailedState>
      ) : (
        <Waiting label="Loading the last hour" className="h-40" />
      )}
    </Sheet>
  )
}
