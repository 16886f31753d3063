import type { PlannedLink, Proposal, Reinforcement } from '@/lib/data/reinforcement-dto'
import { decimalsFor, formatHigh, formatReading } from './format'
import { bow, pathOf } from './stretch/geometry'
import type { StretchLayout } from './stretch/types'

/** What is asked for, as a form holds it. */
export interface Limits {
  links: string
  between: string
  mostDegree: string
  nodes: string
  label: string
}

export const NO_LIMITS: Limits = { links: '3', between: '', mostDegree: '', nodes: '', label: '' }

export function limitsQuery(limits: Limits): string {
  const filled = Object.entries(limits)
    .map(([name, value]) => [name, value.trim()])
    .filter(([, value]) => value !== '')
  return new URLSearchParams(filled).toString()
}

/** Exact figures to the nearest, bounds upward. */
export function forecastText(method: Reinforcement['method'], lambda2: number): string {
  return method === 'exact' ? formatReading(lambda2) : `≤ ${formatHigh(lambda2)}`
}

/** What one link adds, with the decimals of what it leads to. */
export function gainText(method: Reinforcement['method'], { gain, lambda2 }: Proposal): string {
  const decimals = decimalsFor(lambda2)
  return method === 'exact' ? `+${gain.toFixed(decimals)}` : `≤ +${formatHigh(gain, decimals)}`
}

/** What a planned link brought, in words, or what is waited for. */
export function broughtText({ state, before, after, method, lambda2Then, forecast }: PlannedLink): string {
  if (state === 'withdrawn') return 'withdrawn'
  if (state === 'planned') return 'not there yet'
  if (!after) return 'there; waiting for a settled reading'
  if (!before) return `the reading is ${formatReading(after.lambda2)}; the one before is not known`
  const change = after.lambda2 - before.lambda2
  const decimals = decimalsFor(Math.max(after.lambda2, before.lambda2))
  const said = `${change < 0 ? '−' : '+'}${Math.abs(change).toFixed(decimals)}`
  const foretold = (forecast - lambda2Then).toFixed(decimals)
  return `${said}, where ${method === 'exact' ? '' : 'at most '}+${foretold} was foretold`
}

/** The proposed links in a drawing of the nodes; pairs of which a node is not drawn are left out. */
export function proposedPaths(
  layout: StretchLayout,
  proposals: readonly Pick<Proposal, 'a' | 'b'>[],
): { key: string; path: string; ends: { x: number; y: number }[] }[] {
  const dots = new Map(layout.dots.map((dot) => [dot.node.name, dot]))
  return proposals.flatMap(({ a, b }) => {
    const [one, other] = [dots.get(a.name), dots.get(b.name)]
    if (!one || !other) return []
    const [from, to] = one.x <= other.x ? [one, other] : [other, one]
    const ends = [from, to].map(({ x, y }) => ({ x, y }))
    return { key: `${a.name}\n${b.name}`, path: pathOf(bow(from, to, 12)), ends }
  })
}
