import type { Cut, OverlayNode, Reading } from '@/lib/data/dto'
import { formatCount } from './format'

/** Sides are drawn where there are some and it is known of a node on which it is. */
export function drawsSides(nodes: readonly Pick<OverlayNode, 'side'>[], sides: Reading['sides']): boolean {
  return sides !== null && nodes.some(({ side }) => side !== null)
}

/** What is said beside a drawing in which no node has a value; null where one has. */
export function unplacedRemark(
  nodes: readonly Pick<OverlayNode, 'side' | 'value'>[],
  sides: Reading['sides'],
): string | null {
  if (nodes.some(({ value }) => value !== null)) return null
  if (sides !== null && !drawsSides(nodes, sides))
    return 'the thinnest cut is counted, but no node has told its side: they stand by name'
  return 'no node has a value now: they stand by side, where it is known, and by name'
}

export interface Gap {
  /** What stands between the sides, in a few words. */
  text: string
  grave: boolean
}

/** What holds the sides together, for the line above the drawing. */
export function gapText(reading: Reading | null, cut: Cut | null, silent: boolean): Gap {
  if (silent) return { text: 'nothing heard from beyond', grave: true }
  if (reading?.level === 'split') return { text: 'no link holds the sides together', grave: true }
  const links = cut?.crossingLinks ?? reading?.crossingLinks ?? null
  if (links === null) return { text: '', grave: false }
  const verb = links === 1 ? 'holds' : 'hold'
  return { text: `${formatCount(links, 'link')} ${verb} the sides together`, grave: false }
}

/** One sentence that stands for the drawing where it cannot be seen. */
export function stretchSentence(
  nodes: readonly OverlayNode[],
  sided: boolean,
  gap: Gap,
  laneKey: string | null,
) {
  const unheard = nodes.filter((n) => n.state === 'unheard').length
  const lanes = laneKey === null ? '' : `, in lanes by ${laneKey}`
  const heardText = unheard > 0 ? ` ${unheard} of them unheard.` : ''
  if (!sided) {
    return `Stretch view: ${formatCount(nodes.length, 'node')}${lanes}; no sides are drawn.${heardText}`
  }
  const count = (side: 'a' | 'b') => nodes.filter((n) => n.side === side).length
  const between = gap.text ? `; ${gap.text}` : ''
  return `Stretch view: ${formatCount(count('a'), 'node')} on side a, ${formatCount(count('b'), 'node')} on side b${lanes}${between}.${heardText}`
}

/** A node in one line, for the readout below the drawing and for screen readers. */
export function nodeReadout(node: OverlayNode, sided: boolean): string {
  const labels = Object.entries(node.labels).map(([key, value]) => `${key} ${value}`)
  return [
    node.name,
    ...labels,
    sided && node.side ? `side ${node.side}` : null,
    node.value === null ? 'no value' : `value ${node.value.toFixed(2).replace('-', '−')}`,
    node.degree === null ? null : formatCount(node.degree, 'link'),
    node.state,
  ]
    .filter((part) => part !== null)
    .join(' · ')
}
