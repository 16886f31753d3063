import { z } from 'zod'
import { revokeJoiningCode } from '@/lib/data'
import { route } from '@/lib/http'

const params = z.object({ slug: z.string(), id: z.uuid() })

/** Revokes; what was used stays on record. */
export const DELETE = route('joining-code.revoke', { params }, (call, { params }) =>
  revokeJoiningCode(call, params.slug, params.id),
)
