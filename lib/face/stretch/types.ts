import type { OverlayLink, OverlayNode } from '@/lib/data/dto'

export type StretchNode = Pick<OverlayNode, 'name' | 'labels' | 'side' | 'value' | 'state' | 'degree'>
export type StretchLink = Pick<OverlayLink, 'a' | 'b' | 'weight' | 'share' | 'crossing' | 'state'>

export interface StretchInput {
  nodes: readonly StretchNode[]
  links: readonly StretchLink[]
  /** Label whose values make the lanes; null for one lane. */
  laneKey: string | null
  /** False where no cut stands out: then no sides are drawn, whatever the nodes say. */
  sided: boolean
  /** Links over the cut, named or not. */
  crossingLinks: number | null
  /** True while the far side is not heard: what held the sides is then only remembered. */
  silent: boolean
  /** Pixels. */
  width: number
}

export interface Point {
  x: number
  y: number
}

/** A rectangle by its corners. */
export interface Box {
  left: number
  top: number
  right: number
  bottom: number
}

export type DotShape = 'round' | 'square'

export interface Dot extends Point {
  node: StretchNode
  /** Half the width. */
  radius: number
  side: 'a' | 'b' | null
  shape: DotShape
  unheard: boolean
  parked: boolean
}

export interface Lane {
  label: string
  top: number
  height: number
}

export interface Text extends Point {
  text: string
  anchor: 'start' | 'middle' | 'end'
  box: Box
}

/** A quadratic curve. */
export interface Curve {
  from: Point
  bend: Point
  to: Point
}

export interface Taut {
  link: StretchLink
  curve: Curve
  path: string
  /** Stroke, in pixels: grows with the share of λ₂. */
  thickness: number
  lost: boolean
  tag: Text | null
}

/** Links over the cut that may not be named, drawn as one bundle. */
export interface Bundle {
  count: number
  strands: string[]
  /** Brackets that gather either side. */
  brackets: string[]
  lost: boolean
  tag: Text
}

export interface StretchLayout {
  width: number
  height: number
  lanes: Lane[]
  /** From left to right, as a person walks them. */
  dots: Dot[]
  /** Path of all links within the sides. */
  faint: string
  taut: Taut[]
  bundle: Bundle | null
  /** Names beside the ends of crossing links, where there is room. */
  names: Text[]
  /** The column of nodes that have no value, or null. */
  parking: { left: number; label: Text } | null
  dotRadius: number
}
