import { z } from 'zod'
import { incidentsQuerySchema } from '@/lib/data/incident-dto'
import { listIncidents } from '@/lib/data/incidents'
import { route } from '@/lib/http/route'

const query = incidentsQuerySchema.extend({ team: z.string().optional() })

export const GET = route('incident.list', { query }, (call, { query }) => listIncidents(call, query))
