import type { Dot, Lane } from './types'

export type Step = 'left' | 'right' | 'up' | 'down' | 'first' | 'last'

const STEPS: Readonly<Record<string, Step>> = {
  ArrowLeft: 'left',
  ArrowRight: 'right',
  ArrowUp: 'up',
  ArrowDown: 'down',
  Home: 'first',
  End: 'last',
}

/** What a key asks for; null for any other. */
export function stepOf(key: string): Step | null {
  return STEPS[key] ?? null
}

/** The node a step leads to: along the drawing from left to right, or to the nearest in the next lane that has any. */
export function walkFrom(
  { dots, lanes }: { dots: readonly Dot[]; lanes: readonly Lane[] },
  from: string | null,
  step: Step,
): string | null {
  const at = dots.findIndex(({ node }) => node.name === from)
  const name = (index: number) => dots[index]?.node.name ?? null
  const dot = dots[at]
  if (step === 'last') return name(dots.length - 1)
  if (step === 'first' || !dot) return name(0)
  if (step === 'left') return name(Math.max(0, at - 1))
  if (step === 'right') return name(Math.min(dots.length - 1, at + 1))
  const laneOf = ({ y }: Dot) => lanes.findIndex(({ top, height }) => y >= top && y < top + height)
  const own = laneOf(dot)
  const way = step === 'up' ? -1 : 1
  for (let lane = own + way; lane >= 0 && lane < lanes.length; lane += way) {
    const there = dots.filter((each) => laneOf(each) === lane)
    const [first, ...rest] = there
    if (!first) continue
    const away = (each: Dot) => Math.abs(each.x - dot.x)
    return rest.reduce((best, each) => (away(each) < away(best) ? each : best), first).node.name
  }
  return dot.node.name
}

/** Names that a search is for, in the order of the drawing: by name, or by key=value of a label. */
export function findNodes(dots: readonly Dot[], text: string): string[] {
  const words = text.toLowerCase().split(/\s+/).filter(Boolean)
  if (words.length === 0) return []
  return dots
    .filter(({ node }) => {
      const labels = Object.entries(node.labels).map(([key, value]) => `${key}=${value}`)
      const hay = [node.name, ...labels].join('\n').toLowerCase()
      return words.every((word) => hay.includes(word))
    })
    .map(({ node }) => node.name)
}

/** How much wider than the page the drawing may be. */
export const ZOOMS = [1, 1.5, 2, 3, 4, 6, 8] as const

export function zoomBy(zoom: number, steps: number): number {
  const at = ZOOMS.findIndex((each) => each >= zoom)
  return ZOOMS[Math.min(ZOOMS.length - 1, Math.max(0, at + steps))] ?? 1
}
