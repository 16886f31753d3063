import { z } from 'zod'
import { FILE_MOST_BYTES, incidentNumberSchema } from '@/lib/data/incident-dto'
import { attachFile } from '@/lib/data/incident-files'
import { route } from '@/lib/http/route'

const params = z.object({ number: incidentNumberSchema })
const query = z.object({ name: z.string().min(1, 'Give the file a name.').max(300) })

/** The body is the file itself; what it is, is seen by its content. */
export const POST = route(
  'incident.file',
  { params, query, raw: true, maxBytes: FILE_MOST_BYTES, status: 201 },
  (call, { params, query, bytes }) => attachFile(call, params.number, { name: query.name, bytes }),
)
