import { z } from 'zod'
import { incidentNumberSchema } from '@/lib/data/incident-dto'
import { getIncidentReport } from '@/lib/data/incident-report'
import { attachment } from '@/lib/http/attachment'
import { route } from '@/lib/http/route'
import { incidentReport } from '@/lib/report/incident-report'
import { printReport } from '@/lib/report/print'
import { isZone } from '@/lib/report/times'

const params = z.object({ number: incidentNumberSchema })
const query = z.object({ zone: z.string().max(60).refine(isZone, 'Name an IANA time zone.').optional() })

export const GET = route('incident.read', { params, query }, async (call, { params, query }) => {
  const input = await getIncidentReport(call, params.number, query.zone ?? null)
  return attachment({
    name: `incident-${params.number}.pdf`,
    mediaType: 'application/pdf',
    bytes: await printReport(incidentReport(input)),
  })
})
