import { type OverlayEvent as EventRow, OverlayEventSchema } from '@/entities'
import type { FeedEvent } from '@/lib/collector/feed'
import type { OverlayEvent } from '@/lib/data/dto'
import type { EntityManager } from '@/lib/db'
import type { Call } from '@/lib/http/call'
import { openOverlay } from './overlays'
import { presentReading } from './readings'

export const EVENTS_MS = 3_600_000
export const EVENTS_MOST = 500
/** So many of an overlay's newest events a stream looks at again: one may be committed after others with larger ids. */
export const LOOK_BACK_EVENTS = 200

/** Of the last hour, newest first. */
export async function listEvents(call: Call, slug: string): Promise<OverlayEvent[]> {
  const overlay = await openOverlay(call, 'event.read', slug)
  const rows = await call.em.find(
    OverlayEventSchema,
    { overlayId: overlay.id, at: { $gt: new Date(call.now.getTime() - EVENTS_MS) } },
    { orderBy: { at: 'desc', id: 'desc' }, limit: EVENTS_MOST },
  )
  return rows.map(toDto)
}

/** For an event stream, once the caller has been checked: what to look at, and a look at what is new. */
export async function followOverlay(
  call: Call,
  slug: string,
  components: { forkEm(): Promise<EntityManager>; now(): Date },
): Promise<{ overlayId: string; load(event: FeedEvent): Promise<readonly object[]> }> {
  const { id } = await openOverlay(call, 'event.read', slug)
  const newest = await call.em.find(
    OverlayEventSchema,
    { overlayId: id },
    { orderBy: { id: 'desc' }, limit: LOOK_BACK_EVENTS },
  )
  let known = new Set(newest.map((event) => event.id))
  return {
    overlayId: id,
    load: async (event) => {
      const em = await components.forkEm()
      if (event === 'reading') return [await presentReading(em, { id }, components.now())]
      const rows = await em.find(
        OverlayEventSchema,
        { overlayId: id, id: { $gt: known.size < LOOK_BACK_EVENTS ? 0 : Math.min(...known) } },
        { orderBy: { id: 'asc' }, limit: EVENTS_MOST + LOOK_BACK_EVENTS },
      )
      const unsent = rows.filter((event) => !known.has(event.id))
      const ids = [...known, ...unsent.map((event) => event.id)].sort((a, b) => b - a)
      known = new Set(ids.slice(0, LOOK_BACK_EVENTS))
      return unsent.map(toDto)
    },
  }
}

function toDto({ id, at, kind, text }: EventRow): OverlayEvent {
  return { id: String(id), at: at.toISOString(), kind, text }
}
