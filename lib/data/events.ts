import { type OverlayEvent as EventRow, OverlayEventSchema } from '@/entities'
import type { FeedEvent } from '@/lib/collector/feed'
import type { OverlayEvent } from '@/lib/data/dto'
import type { EntityManager } from '@/lib/db'
import type { Call } from '@/lib/http/call'
import { openOverlay } from './overlays'
import { presentReading } from './readings'
import { sightedText } from './said-sight'
import { type Sight, sightOf } from './sight'

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
  const sight = await sightOf(call, overlay)
  return rows.flatMap((row) => seen(row, sight))
}

/** For an event stream, once the caller has been checked: what to look at, and a look at what is new. */
export async function followOverlay(
  call: Call,
  slug: string,
  components: { forkEm(): Promise<EntityManager>; now(): Date },
): Promise<{ overlayId: string; load(event: FeedEvent): Promise<readonly object[]> }> {
  const overlay = await openOverlay(call, 'event.read', slug)
  const { id } = overlay
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
      // Each time: agents of other teams may have joined since.
      const sight = await sightOf({ ...call, em }, overlay)
      if (event === 'reading') return [await presentReading(em, { id }, components.now(), sight)]
      const rows = await em.find(
        OverlayEventSchema,
        { overlayId: id, id: { $gt: known.size < LOOK_BACK_EVENTS ? 0 : Math.min(...known) } },
        { orderBy: { id: 'asc' }, limit: EVENTS_MOST + LOOK_BACK_EVENTS },
      )
      const unsent = rows.filter((event) => !known.has(event.id))
      const ids = [...known, ...unsent.map((event) => event.id)].sort((a, b) => b - a)
      known = new Set(ids.slice(0, LOOK_BACK_EVENTS))
      return unsent.flatMap((row) => seen(row, sight))
    },
  }
}

/** Nothing where it is told to another team. */
function seen({ id, at, kind, text, data, teamId }: EventRow, sight: Sight): OverlayEvent[] {
  const told = { id: String(id), at: at.toISOString(), kind }
  if (!sight.isTold(teamId)) return []
  const words = sightedText({ text, data, isNaming: NAMING.has(kind) }, sight)
  return words === null ? [] : [{ ...told, text: words }]
}

/** Kinds whose text names nodes, or is one team's: from before texts were kept in parts. */
const NAMING = new Set<EventRow['kind']>([
  'agent-joined',
  'agent-left',
  'agent-revoked',
  'agent-unheard',
  'agent-heard',
  'link-lost',
  'link-found',
  'agent-left-out',
  'agent-readmitted',
  'agent-cloned',
  'collector-away',
  'upgrade-offered',
  'upgrade-halted',
  'incident-raised',
  'incident-cleared',
])
