'use server'

import { z } from 'zod'
import { changePart, createInvitation, endPartnership, withdrawInvitation } from '@/lib/data'
import { newInvitationSchema } from '@/lib/data/partner-dto'
import { action } from '@/lib/http'
import { partFieldsSchema } from './fields'

const slug = z.string()

export const inviteAction = action(
  'partner.invite',
  z.object({
    slug,
    expiresInHours: z.coerce.number().pipe(newInvitationSchema.shape.expiresInHours.unwrap()),
  }),
  (call, { slug, ...input }) => createInvitation(call, slug, input),
)

export const withdrawAction = action(
  'partner.invite',
  z.object({ slug, id: z.string() }),
  (call, { slug, id }) => withdrawInvitation(call, slug, id),
)

export const changePartAction = action('partner.change', partFieldsSchema, (call, { slug, ...change }) =>
  changePart(call, slug, change),
)

export const endPartnershipAction = action(
  'partner.end',
  z.object({ slug, team: z.string() }),
  (call, { slug, team }) => endPartnership(call, slug, team),
)
