import { type OverlayEvent as EventRow, OverlayEventSchema } from '@/entities'
import type { FeedEvent } from '@/lib/collector/feed'
import type { OverlayEvent } from '@/lib/data/dto'
import type { EntityManager } from '@/lib/db'
import type { Call } from '@/lib/http/call'
import { openOverlay } from './overlays'
import { presentReading } from './readings'

export const EVENTS_MS = 3_600_000
export const EVENTS_MOST = 500

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
  const [newest] = await call.em.find(
    OverlayEventSchema,
    { overlayId: id },
    { orderBy: { id: 'desc' }, limit: 1 },
  )
  let seen = newest?.id ?? 0
  return {
    overlayId: id,
    load: async (event) => {
      const em = await components.forkEm()
      if (event === 'reading') return [await presentReading(em, { id }, components.now())]
      const rows = await em.find(
        OverlayEventSchema,
        { overlayId: id, id: { $gt: seen } },
        { orderBy: { id: 'asc' }, limit: EVENTS_MOST },
      )
      seen = rows[rows.length - 1]?.id ?? seen
      return rows.map(toDto)
    },
  }
}

function toDto({ id, at, kind, text }: EventRow): OverlayEvent {
  return { id: String(id), at: at.toISOString(), kind, text }
}
