import { z } from 'zod'
import { endWindow } from '@/lib/data/windows'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string(), id: z.string() })

/** Ends it, all of it; it stays on record. */
export const DELETE = route('window.change', { params }, (call, { params }) =>
  endWindow(call, params.slug, params.id),
)
