import { z } from 'zod'
import { haltUpgrade } from '@/lib/data/upgrades'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string(), id: z.string() })

/** Halts; what was offered stays on record. */
export const DELETE = route('upgrade.halt', { params }, (call, { params }) =>
  haltUpgrade(call, params.slug, params.id),
)
