'use server'

import { z } from 'zod'
import { createJoiningCode, revokeJoiningCode } from '@/lib/data'
import { newJoiningCodeSchema } from '@/lib/data/dto'
import { action } from '@/lib/http'

const createSchema = newJoiningCodeSchema.extend({
  slug: z.string(),
  uses: z.coerce.number().pipe(newJoiningCodeSchema.shape.uses.unwrap()),
  expiresInHours: z.coerce.number().pipe(newJoiningCodeSchema.shape.expiresInHours.unwrap()),
})

export const createJoiningCodeAction = action(
  'joining-code.create',
  createSchema,
  (call, { slug, ...input }) => createJoiningCode(call, slug, input),
)

export const revokeJoiningCodeAction = action(
  'joining-code.revoke',
  z.object({ slug: z.string(), id: z.string() }),
  (call, { slug, id }) => revokeJoiningCode(call, slug, id),
)
