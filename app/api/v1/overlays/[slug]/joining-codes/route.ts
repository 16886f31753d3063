import { z } from 'zod'
import { createJoiningCode, listJoiningCodes } from '@/lib/data'
import { newJoiningCodeSchema } from '@/lib/data/dto'
import { route } from '@/lib/http'

const params = z.object({ slug: z.string() })

export const GET = route('joining-code.list', { params }, async (call, { params }) => ({
  items: await listJoiningCodes(call, params.slug),
  next: null,
}))

export const POST = route(
  'joining-code.create',
  { params, body: newJoiningCodeSchema, status: 201 },
  (call, { params, body }) => createJoiningCode(call, params.slug, body),
)
