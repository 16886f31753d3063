'use client'

import { useEffect } from 'react'
import type { Overlay } from '@/lib/data/dto'
import { ACTING_CHANNEL, actingCookie } from '@/lib/face/acting'

type Props = Pick<Overlay, 'slug' | 'seats' | 'as'>

/** For people who belong to several of the teams that share the overlay: as which of them they look and act. */
export function ActingFor({ slug, seats = [], as }: Props) {
  const several = seats.length > 1
  useEffect(() => {
    if (!several) return
    // What another page shows, and would do, is of the team chosen before.
    const channel = new BroadcastChannel(ACTING_CHANNEL)
    channel.onmessage = () => open(slug)
    return () => channel.close()
  }, [several, slug])
  if (!several) return null
  function choose(team: string) {
    // biome-ignore lint/suspicious/noDocumentCookie: the Cookie Store API is not in every browser
    document.cookie = actingCookie(team)
    const channel = new BroadcastChannel(ACTING_CHANNEL)
    channel.postMessage(team)
    channel.close()
    open(slug)
  }
  return (
    <label className="mt-1 block text-sm text-soft">
      acting for
      <select
        value={as?.slug ?? ''}
        onChange={(event) => choose(event.target.value)}
        className="block min-h-9 w-full max-w-44 truncate border border-edge bg-paper pr-6 pl-1 text-ink"
      >
        {seats.map(({ slug, name }) => (
          <option key={slug} value={slug}>
            {name}
          </option>
        ))}
      </select>
      {seats.find(({ slug }) => slug === as?.slug)?.role}
    </label>
  )
}

/** Anew, from the overlay's first page: the page of a node has another address for each team. */
function open(slug: string) {
  window.location.assign(`/overlays/${slug}`)
}
