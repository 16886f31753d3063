import { z } from 'zod'
import { getCut } from '@/lib/data/cut'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string() })

export const GET = route('reading.read', { params }, (call, { params }) => getCut(call, params.slug))
