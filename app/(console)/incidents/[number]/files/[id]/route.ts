import { z } from 'zod'
import { incidentNumberSchema } from '@/lib/data/incident-dto'
import { readFile } from '@/lib/data/incident-files'
import { attachment } from '@/lib/http/attachment'
import { route } from '@/lib/http/route'

const params = z.object({ number: incidentNumberSchema, id: z.string() })

/** What somebody else has attached: saved, never shown as a page of this server. */
export const GET = route('incident.read', { params }, async (call, { params }) => {
  const { name, mediaType, bytes } = await readFile(call, params.number, params.id)
  return attachment({ name, mediaType, bytes })
})
