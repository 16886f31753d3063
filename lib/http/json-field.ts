import { z } from 'zod'

/** A form of many kinds of fields sends them as one. */
export const jsonField = z.string().transform((text, context): unknown => {
  try {
    return JSON.parse(text)
  } catch {
    context.addIssue({ code: 'custom', message: 'Load the page again.' })
    return z.NEVER
  }
})
