'use server'

import { z } from 'zod'
import { cancelRehearsal, createRehearsal } from '@/lib/data'
import { newRehearsalSchema } from '@/lib/data/rehearsal-dto'
import { action } from '@/lib/http'
import { jsonField } from '@/lib/http/json-field'

export const startRehearsalAction = action(
  'rehearsal.start',
  z.object({ slug: z.string(), rehearsal: jsonField.pipe(newRehearsalSchema) }),
  (call, { slug, rehearsal }) => createRehearsal(call, slug, rehearsal),
)

export const cancelRehearsalAction = action(
  'rehearsal.cancel',
  z.object({ slug: z.string(), id: z.string() }),
  (call, { slug, id }) => cancelRehearsal(call, slug, id),
)
