import { z } from 'zod'
import { getReading } from '@/lib/data/readings'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string() })

export const GET = route('reading.read', { params }, (call, { params }) => getReading(call, params.slug))
