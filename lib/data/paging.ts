import { z } from 'zod'

export const PAGE_MOST = 1_000
export const PAGE_DEFAULT = 500

export const pageSchema = z.object({
  /** What the last page gave as `next`. */
  after: z.string().max(300).optional(),
  limit: z.coerce.number().int().min(1).max(PAGE_MOST).default(PAGE_DEFAULT),
})
export type Page = z.output<typeof pageSchema>
