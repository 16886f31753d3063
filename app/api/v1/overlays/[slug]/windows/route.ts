import { z } from 'zod'
import { newWindowSchema } from '@/lib/data/rules-dto'
import { createWindow, listWindows } from '@/lib/data/windows'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string() })

export const GET = route('rule.list', { params }, (call, { params }) => listWindows(call, params.slug))

export const POST = route(
  'window.change',
  { params, body: newWindowSchema, status: 201 },
  (call, { params, body }) => createWindow(call, params.slug, body),
)
