import { z } from 'zod'
import type { Sight } from './sight'

const saidSchema = z.object({
  said: z.array(
    z.union([z.string(), z.object({ node: z.string() }), z.object({ of: z.string(), text: z.string() })]),
  ),
})

/**
 * A text that is kept of an event, for one reader: from its parts where it has any. What has none and may name nodes is
 * from before it was kept in parts, when all were the owning team's: nobody else reads it. Null for nothing.
 */
export function sightedText(
  { text, data, isNaming }: { text: string; data: unknown; isNaming: boolean },
  sight: Sight,
): string | null {
  if (sight.isWhole) return text
  const parts = saidSchema.safeParse(data)
  if (parts.success) return sight.say(parts.data.said)
  return isNaming && !sight.isOwners ? null : text
}
