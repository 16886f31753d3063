import { z } from 'zod'
import { follow, type PathStep } from './path-expression'
import type { NodeItem, ReadResult } from './source'

const node = z.string().trim().min(1).max(300)
const itemSchema = z.union([
  node.transform((text): NodeItem => ({ node: text, quality: null })),
  z
    .object({ address: node, quality: z.number().min(0).max(1).nullish(), up: z.boolean().nullish() })
    .transform(
      ({ address, quality, up }): NodeItem => ({
        node: address,
        quality: up === false ? 0 : (quality ?? (up === true ? 1 : null)),
      }),
    ),
])

const EACH: readonly PathStep[] = ['each']
export const MAX_ITEMS = 10_000

/** JSON where `steps` is given or the text begins like JSON, else one neighbour per line; # begins a comment. */
export function parseItems(text: string, steps: readonly PathStep[] | null): ReadResult {
  if (steps === null && !/^\s*[[{]/.test(text)) {
    const lines = text.split('\n').map((line) => line.replace(/(^|\s)#.*$/, '').trim())
    return collect(lines.filter((line) => line !== ''))
  }
  try {
    return itemsOf(JSON.parse(text), steps)
  } catch {
    return { ok: false, reason: 'not JSON, or not whole yet' }
  }
}

export function itemsOf(json: unknown, steps: readonly PathStep[] | null): ReadResult {
  const found = follow(json, steps ?? EACH)
  return found === null ? { ok: false, reason: 'nothing is where the path leads' } : collect(found)
}

function collect(found: readonly unknown[]): ReadResult {
  if (found.length > MAX_ITEMS) return { ok: false, reason: `more than ${MAX_ITEMS} neighbours` }
  const items = new Map<string, NodeItem>()
  for (const [index, value] of found.entries()) {
    const parsed = itemSchema.safeParse(value)
    if (!parsed.success)
      return { ok: false, reason: `entry ${index + 1} is neither an address nor an object with one` }
    items.set(parsed.data.node, parsed.data)
  }
  return { ok: true, items: [...items.values()] }
}
