import { z } from 'zod'
import { getOverlay } from '@/lib/data'
import { route } from '@/lib/http'

const params = z.object({ slug: z.string() })

export const GET = route('overlay.read', { params }, (call, { params }) => getOverlay(call, params.slug))
