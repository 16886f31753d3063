'use server'

import { z } from 'zod'
import { markJoined, planLink, withdrawLink } from '@/lib/data'
import { newPlannedLinkSchema } from '@/lib/data/reinforcement-dto'
import { action } from '@/lib/http'

const planned = z.object({ slug: z.string(), id: z.string() })

export const planLinkAction = action(
  'reinforcement.plan',
  newPlannedLinkSchema.extend({ slug: z.string() }),
  (call, { slug, a, b }) => planLink(call, slug, { a, b }),
)

export const markJoinedAction = action('reinforcement.plan', planned, (call, { slug, id }) =>
  markJoined(call, slug, id),
)

export const withdrawLinkAction = action('reinforcement.plan', planned, (call, { slug, id }) =>
  withdrawLink(call, slug, id),
)
