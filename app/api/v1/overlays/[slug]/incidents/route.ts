import { z } from 'zod'
import { incidentsQuerySchema } from '@/lib/data/incident-dto'
import { listOverlayIncidents } from '@/lib/data/incidents'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string() })

export const GET = route(
  'incident.list',
  { params, query: incidentsQuerySchema },
  (call, { params, query }) => listOverlayIncidents(call, params.slug, query),
)
