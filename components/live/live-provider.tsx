'use client'

import { createContext, type ReactNode, useContext, useEffect, useState } from 'react'
import { useSWRConfig } from 'swr'
import { readingSchema } from '@/lib/data/dto'
import { INCIDENTS_URL, overlayUrls } from '@/lib/face/urls'
import { keepEventSource } from './event-source'

/** While the stream is down, pages ask at this interval instead. */
export const POLL_MS = 5_000
/** Node and link lists are larger and slower than the reading: at most this often. */
const LISTS_MS = 4_000
/** Of readings that come closer together only the last is shown: a page that was asleep gets all it missed at once. */
const READING_MS = 100

const StreamingContext = createContext(false)

/** True while the event stream of the page is open. */
export function useStreaming(): boolean {
  return useContext(StreamingContext)
}

/** One event stream for the page: says which cached answers are out of date. */
export function LiveProvider({ slug, children }: { slug: string; children: ReactNode }) {
  const { mutate } = useSWRConfig()
  const [streaming, setStreaming] = useState(false)

  useEffect(() => {
    const urls = overlayUrls(slug)
    const closing = new AbortController()
    let listsDue: ReturnType<typeof setTimeout> | null = null
    let readingDue: ReturnType<typeof setTimeout> | null = null
    let latest: unknown = null

    const refreshLists = () => {
      listsDue ??= setTimeout(() => {
        listsDue = null
        for (const url of [urls.nodes, urls.links, urls.cut, urls.incidents]) void mutate(url)
        void mutate((key) => typeof key === 'string' && key.startsWith(INCIDENTS_URL))
      }, LISTS_MS)
    }
    const onReading = (data: unknown) => {
      latest = data
      readingDue ??= setTimeout(() => {
        readingDue = null
        const reading = parseReading(latest)
        void (reading ? mutate(urls.reading, reading, { revalidate: false }) : mutate(urls.reading))
      }, READING_MS)
      refreshLists()
    }
    const onEvent = () => {
      for (const url of [urls.events, urls.codes, urls.overlay]) void mutate(url)
      void mutate((key) => typeof key === 'string' && key.startsWith(urls.rehearsals))
      refreshLists()
    }
    const on = { reading: onReading, event: onEvent }
    keepEventSource(urls.events, { onOpen: setStreaming, on }, closing.signal)
    return () => {
      closing.abort()
      if (listsDue) clearTimeout(listsDue)
      if (readingDue) clearTimeout(readingDue)
    }
  }, [slug, mutate])

  return <StreamingContext value={streaming}>{children}</StreamingContext>
}

function parseReading(data: unknown) {
  if (typeof data !== 'string') return null
  try {
    return readingSchema.safeParse(JSON.parse(data)).data ?? null
  } catch {
    return null
  }
}
