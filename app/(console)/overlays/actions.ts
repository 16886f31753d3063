'use server'

import { redirect } from 'next/navigation'
import { z } from 'zod'
import { joinAsPartner } from '@/lib/data'
import { redeemSchema } from '@/lib/data/partner-dto'
import { action } from '@/lib/http'

/** A field left empty is one not given. */
const formSchema = redeemSchema.extend({
  team: z
    .literal('')
    .transform(() => undefined)
    .or(z.string())
    .optional(),
})

export const joinOverlayAction = action('partner.join', formSchema, joinAsPartner, {
  after: ({ slug }) => redirect(`/overlays/${slug}`),
})
