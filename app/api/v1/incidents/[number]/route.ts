import { z } from 'zod'
import { incidentNumberSchema } from '@/lib/data/incident-dto'
import { getIncident } from '@/lib/data/incidents'
import { route } from '@/lib/http/route'

const params = z.object({ number: incidentNumberSchema })

export const GET = route('incident.read', { params }, (call, { params }) => getIncident(call, params.number))
