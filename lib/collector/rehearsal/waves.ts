import type { RehearsalPlan, RehearsalResult } from '@/lib/data/rehearsal-dto'
import { countOf, listOf } from '../words'

/** No order is looked for any further than this. */
export const MOST_TRIES = 16

export interface WaveNode {
  name: string
  labels: Readonly<Record<string, string>>
  /** Its Fiedler value, as far as it is said. */
  value: number | null
}

/** A wave of some nodes holds, does not, or gave no answer. */
export type WaveOutcome = { holds: NonNullable<RehearsalResult['reading']> } | 'does-not-hold' | 'no-answer'

export type WavesEnd =
  | { waves: NonNullable<RehearsalResult['waves']> }
  /** `alone`: not even this node may go by itself. */
  | { waves: null; because: 'alone'; node: string }
  | { waves: null; because: 'tries' | 'no-answer' }

/**
 * Not all can go at once: half of them first. A wave that does not hold is halved; one that holds is done with, and the next is no larger.
 * @param nodes all that are to go, at least two
 */
export function firstWave(nodes: readonly WaveNode[]): RehearsalPlan {
  const left = spreadOut(nodes)
  return { held: [], left, tried: pickOf(left, Math.ceil(left.length / 2)), tries: 1 }
}

export function nextWave(
  { held, left, tried, tries }: RehearsalPlan,
  outcome: WaveOutcome,
): { plan: RehearsalPlan } | { end: WavesEnd } {
  if (outcome === 'no-answer') return { end: { waves: null, because: 'no-answer' } }
  const hasHeld = outcome !== 'does-not-hold'
  const [only] = tried
  if (!hasHeld && tried.length === 1 && only) return { end: { waves: null, because: 'alone', node: only } }
  const rest = hasHeld ? left.filter((name) => !tried.includes(name)) : left
  const waves = hasHeld ? [...held, { nodes: [...tried].sort(), ...outcome.holds }] : held
  if (rest.length === 0) return { end: { waves } }
  if (tries >= MOST_TRIES) return { end: { waves: null, because: 'tries' } }
  const size = hasHeld ? tried.length : Math.ceil(tried.length / 2)
  return {
    plan: { held: waves, left: rest, tried: pickOf(rest, Math.min(size, rest.length)), tries: tries + 1 },
  }
}

/** Neighbours in this order are alike in labels and place, so that every so-manieth of them are spread over both. */
function spreadOut(nodes: readonly WaveNode[]): string[] {
  const shared = [...new Set(nodes.flatMap(({ labels }) => Object.keys(labels)))].sort().filter((key) => {
    const values = new Set(nodes.map(({ labels }) => labels[key]))
    return values.size > 1 && values.size <= nodes.length / 2
  })
  const placeOf = ({ labels }: WaveNode): string => shared.map((key) => labels[key] ?? '').join('\n')
  return [...nodes]
    .sort((a, b) => {
      const [one, other] = [placeOf(a), placeOf(b)]
      if (one !== other) return one < other ? -1 : 1
      const apart = (a.value ?? 0) - (b.value ?? 0)
      return apart !== 0 ? apart : a.name < b.name ? -1 : 1
    })
    .map(({ name }) => name)
}

function pickOf(names: readonly string[], count: number): string[] {
  return Array.from(
    { length: count },
    (_, index) => names[Math.floor(((index + 0.5) * names.length) / count)] ?? '',
  )
}

/** Ends the verdict where not all can go at once. */
export function wavesSentence(end: WavesEnd): string {
  if (end.waves) {
    const sizes = end.waves.map(({ nodes }) => String(nodes.length))
    return `It holds in ${countOf(end.waves.length, 'wave')}, of ${listOf(sizes, 20)} nodes, one after the other.`
  }
  switch (end.because) {
    case 'alone':
      return `No order in waves was found: not even ${end.node} may go by itself.`
    case 'tries':
      return `No order in waves was found in ${countOf(MOST_TRIES, 'rehearsal')}.`
    case 'no-answer':
      return 'Looking for an order in waves came to no answer; repeat it with fewer nodes.'
  }
}
