'use client'

import type { Overlay } from '@/lib/data/dto'
import { actingCookie } from '@/lib/face/acting'

/** For people who belong to several of the teams that share the overlay: as which of them they look and act. */
export function ActingFor({ seats = [], as }: Pick<Overlay, 'seats' | 'as'>) {
  if (seats.length < 2) return null
  function choose(team: string) {
    // biome-ignore lint/suspicious/noDocumentCookie: the Cookie Store API is not in every browser
    document.cookie = actingCookie(team)
    // All that is on the page and under way is of the other team.
    window.location.reload()
  }
  return (
    <label className="mt-1 block text-sm text-soft">
      acting for
      <select
        value={as?.slug ?? ''}
        onChange={(event) => choose(event.target.value)}
        className="block min-h-9 w-full max-w-44 border border-edge bg-paper px-1 text-ink"
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
