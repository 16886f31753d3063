import type { OverlayNode } from '@/lib/data/dto'
import { takableOf } from './choice'

export interface Pasted {
  /** Names of nodes that have joined, once each, in the order they came. */
  names: string[]
  /** What could not be taken, with its line and why. */
  errors: { line: number; text: string; because: string }[]
}

/**
 * Reads a pasted list: one name a line, or several with commas, semicolons, tabs or spaces between them. A line that is a
 * name as a whole is taken as one, since names may hold all of these.
 */
export function readPasted(text: string, nodes: readonly OverlayNode[]): Pasted {
  const byName = new Map(nodes.map((node) => [node.name, node]))
  const joined = new Set(takableOf(nodes).map(({ name }) => name))
  const byFolded = new Map(nodes.map(({ name }) => [name.toLowerCase(), name]))
  const names = new Set<string>()
  const errors: Pasted['errors'] = []
  const take = (name: string, line: number) => {
    if (joined.has(name)) return names.add(name)
    const near = byFolded.get(name.toLowerCase())
    const state = byName.get(name)?.state
    const because = state
      ? `it is not there any more (${STATE_REASONS[state] ?? state}), so it is away already`
      : near
        ? `no node is called so; ${near} is written otherwise`
        : 'no node of this overlay is called so'
    return errors.push({ line, text: name, because })
  }
  for (const [index, row] of text.split(/\r?\n/).entries()) {
    const whole = row.trim()
    if (whole === '') continue
    if (byName.has(whole)) take(whole, index + 1)
    else for (const part of whole.split(/[\s,;]+/).filter(Boolean)) take(part, index + 1)
  }
  return { names: [...names], errors }
}

const STATE_REASONS: Partial<Record<OverlayNode['state'], string>> = {
  left: 'left',
  revoked: 'revoked',
  'left-out': 'left out',
}
