'use server'

import { z } from 'zod'
import { haltUpgrade, offerUpgrade, rotateSigningKey, setRetireAfter } from '@/lib/data'
import { newUpgradeOfferSchema } from '@/lib/data/dto'
import { action } from '@/lib/http'

/** "key=value" or "*" for every agent, as the form's choices have it. */
const labelField = z
  .string()
  .min(1, 'Choose whom it is offered to.')
  .transform((text) => {
    const at = text.indexOf('=')
    return text === '*' ? null : { key: text.slice(0, at), value: text.slice(at + 1) }
  })

export const offerUpgradeAction = action(
  'upgrade.offer',
  newUpgradeOfferSchema.extend({ slug: z.string(), label: labelField }),
  (call, { slug, ...input }) => offerUpgrade(call, slug, input),
)

export const haltUpgradeAction = action(
  'upgrade.halt',
  z.object({ slug: z.string(), id: z.string() }),
  (call, { slug, id }) => haltUpgrade(call, slug, id),
)

/** Empty for never. */
const hoursField = z
  .literal('')
  .transform(() => null)
  .or(z.coerce.number().int().positive())

export const setRetireAfterAction = action(
  'overlay.change',
  z.object({ slug: z.string(), hours: hoursField }),
  (call, { slug, hours }) => setRetireAfter(call, slug, hours),
)

export const rotateSigningKeyAction = action(
  'signing-key.rotate',
  z.object({ slug: z.string() }),
  (call, { slug }) => rotateSigningKey(call, slug),
)
