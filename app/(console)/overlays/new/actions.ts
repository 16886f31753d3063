'use server'

import { redirect } from 'next/navigation'
import { z } from 'zod'
import { createOverlay } from '@/lib/data'
import { newOverlaySchema } from '@/lib/data/dto'
import { action } from '@/lib/http'

/** A field left empty is one not given. */
const blankAs = <T>(value: T) => z.literal('').transform(() => value)

const formSchema = newOverlaySchema.extend({
  contact: blankAs(null).or(newOverlaySchema.shape.contact),
  runbookUrl: blankAs(null).or(z.url({ protocol: /^https?$/, error: 'Give a whole address: https://…' })),
  team: blankAs(undefined).or(z.string()).optional(),
})

export const createOverlayAction = action('overlay.create', formSchema, createOverlay, {
  after: ({ slug }) => redirect(`/overlays/${slug}`),
})
