import { z } from 'zod'
import { withdrawInvitation } from '@/lib/data'
import { route } from '@/lib/http'

const params = z.object({ slug: z.string(), id: z.uuid() })

/** Withdraws it; a team that has accepted stays. */
export const DELETE = route('partner.invite', { params }, (call, { params }) =>
  withdrawInvitation(call, params.slug, params.id),
)
