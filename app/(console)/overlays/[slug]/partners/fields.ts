import { z } from 'zod'
import { partShownSchema } from '@/lib/data/partner-dto'

const LABEL = 'label:'

const partSchema = partShownSchema.extend({ slug: z.string() })

/** One field for each label that is ticked. */
export const partFieldsSchema = z
  .record(z.string(), z.string())
  .transform(({ slug = '', contact, ...fields }): z.input<typeof partSchema> => {
    const ticked = Object.keys(fields).filter((name) => name.startsWith(LABEL))
    return { slug, contact, sharedLabels: ticked.map((name) => name.slice(LABEL.length)) }
  })
  .pipe(partSchema)
