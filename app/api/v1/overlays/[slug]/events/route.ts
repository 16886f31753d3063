import { z } from 'zod'
import { eventStream } from '@/lib/collector/event-stream'
import { getFeed, systemClock } from '@/lib/collector/process'
import { followOverlay, listEvents } from '@/lib/data/events'
import { processSignal } from '@/lib/http/process-signal'
import { route } from '@/lib/http/route'
import { getRuntime } from '@/lib/http/runtime'

const params = z.object({ slug: z.string() })

/** A stream for whoever asks for one, else the last hour as a list. */
export const GET = route('event.read', { params }, async (call, { params, request }) => {
  if (!request.headers.get('accept')?.includes('text/event-stream'))
    return { items: await listEvents(call, params.slug) }
  const { overlayId, load } = await followOverlay(call, params.slug, getRuntime())
  return eventStream(
    { clock: systemClock, listen: (fn, signal) => getFeed().listen(overlayId, fn, signal), load },
    [processSignal(), request.signal],
  )
})
