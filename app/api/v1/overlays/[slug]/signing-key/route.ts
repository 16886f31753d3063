import { z } from 'zod'
import { getSigningKey, rotateSigningKey } from '@/lib/data/signing-key'
import { route } from '@/lib/http/route'

const params = z.object({ slug: z.string() })

export const GET = route('signing-key.read', { params }, (call, { params }) =>
  getSigningKey(call, params.slug),
)

/** Begins a rotation. */
export const POST = route('signing-key.rotate', { params }, (call, { params }) =>
  rotateSigningKey(call, params.slug),
)
