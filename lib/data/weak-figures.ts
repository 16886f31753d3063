import type { OverlayNode, Reading } from '@/lib/data/dto'
import { headlineLambda2 } from '@/lib/face/weak-links'
import {
  type CutSizes,
  conductanceOf,
  expansionBounds,
  expansionOf,
  lambda2AtMost,
} from '@/lib/method/cut-bounds'
import type { WeakPlace } from './weak-dto'

export type WeakNode = Pick<OverlayNode, 'name' | 'labels' | 'side' | 'state' | 'weightedDegree'>

const finite = (value: number): number | null => (Number.isFinite(value) ? value : null)

/** Sizes of the sides, and what follows from them. Null while there are none. */
export function figuresOf(
  reading: Reading,
  nodes: readonly WeakNode[],
): Pick<WeakPlace, 'sides' | 'crossing' | 'figures'> {
  const { sides, crossingLinks, crossingWeight } = reading
  if (!sides || crossingLinks === null || crossingWeight === null)
    return { sides: null, crossing: null, figures: null }
  const [one, other] = sides
  const [a, b] = [volumeOf(nodes, 'a'), volumeOf(nodes, 'b')]
  const cut: CutSizes = {
    weight: crossingWeight,
    nodes: [one.nodes, other.nodes],
    volumes: a === null || b === null ? null : [a, b],
  }
  const conductance = conductanceOf(cut)
  const bounds = boundsOf(reading, nodes)
  return {
    sides: [
      { ...one, volume: a },
      { ...other, volume: b },
    ],
    crossing: { links: crossingLinks, weight: crossingWeight },
    figures: {
      expansion: finite(expansionOf(cut)),
      // Degrees are of the last reports, the cut was counted a little before: together they may come to more than all.
      conductance: conductance === null ? null : Math.min(1, conductance),
      lambda2AtMost: finite(lambda2AtMost(cut)),
      least: bounds?.least ?? null,
      most: bounds?.most ?? null,
    },
  }
}

function volumeOf(nodes: readonly WeakNode[], side: 'a' | 'b'): number | null {
  const degrees = nodes.flatMap((node) => (node.side === side ? [node.weightedDegree] : []))
  const known = degrees.filter((degree) => degree !== null)
  return known.length > 0 && known.length === degrees.length
    ? known.reduce((sum, degree) => sum + degree, 0)
    : null
}

/** From both ends of the interval, so that the bounds stand whichever λ₂ in it is true. */
function boundsOf(reading: Reading, nodes: readonly WeakNode[]) {
  const lambda2 = headlineLambda2(reading)
  if (lambda2 === null) return null
  const { low, high } = reading.core ?? reading
  const degrees = nodes.flatMap(({ side, weightedDegree }) => (side ? [weightedDegree] : []))
  const known = degrees.filter((degree) => degree !== null)
  const most = known.length > 0 && known.length === degrees.length ? Math.max(...known) : null
  return {
    least: expansionBounds(low ?? lambda2, null).least,
    most: expansionBounds(high ?? lambda2, most).most,
  }
}

export function runnerUpOf({ runnerUp, sides }: Reading): WeakPlace['runnerUp'] {
  if (!runnerUp || !sides) return null
  return { ...runnerUp, expansion: expansionOf({ ...runnerUp, nodes: runnerUp.sides, volumes: null }) }
}

/** Why there are no sides to look at, and what to do about it. */
export function whyNoSides(reading: Reading): WeakPlace['withheld'] {
  if (reading.sides) return null
  if (reading.coverage.joined === 0)
    return {
      because: 'nothing-joined',
      sentence: 'No agents have joined yet, so there is no cut to look at.',
      next: 'Create a joining code and put an agent beside each node.',
    }
  if (reading.data === 'unheard')
    return {
      because: 'unheard',
      sentence: 'No sides are drawn: too few agents are heard to count a cut.',
      next: 'See on Nodes who is unheard. Where those lie together, treat the overlay as split until they are heard.',
    }
  if (reading.singleCut === false)
    return {
      because: 'shared',
      sentence:
        'No sides are drawn: the weakest cuts are about equally strong, so none of them is the weak place.',
      next: 'There is no one place to mend. Nodes with few links are listed first on Nodes when sorted by links.',
    }
  return {
    because: 'not-counted',
    sentence: 'No sides are drawn: no cut has been counted yet.',
    next: 'The first is counted within a minute of the links standing. If it takes longer, see on Nodes which agents have links.',
  }
}

/** What must be known of the sides that are drawn. */
export function remarkOf(reading: Reading): string | null {
  if (!reading.sides) return null
  if (reading.treatAsSplit)
    return 'Agents that lie together are unheard together: treat the overlay as split. What held the sides is what was last heard of it.'
  if (reading.data === 'unheard')
    return 'Too few agents are heard: sides and links are those of the last good reading.'
  if (reading.level === 'split')
    return 'The overlay has come apart here. Any one link between the sides joins it again.'
  if (reading.level === 'firm')
    return 'The overlay is firm: this is the thinnest cut found, not one to worry about.'
  if (reading.data === 'settling') return 'The reading is settling: shares and sides may still move.'
  return null
}
