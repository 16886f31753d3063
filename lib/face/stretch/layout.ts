import { axisPositions } from './axis'
import { boxAround, textWidth } from './geometry'
import { NAME_PX, nameDots, Occupied, tagLinks } from './labels'
import { groupLanes, type LaneGroup } from './lanes'
import { bundleOf, faintPath, tautLinks } from './links'
import { type Packed, packLane } from './pack'
import type { Box, Dot, Lane, StretchInput, StretchLayout, StretchNode } from './types'

/** Under this width lane labels stand above their lanes. */
const NARROW_PX = 640
const LANE_PAD = 12
/** Lanes are this high at least: few lanes get more air. */
const laneHeight = (lanes: number) => (lanes <= 2 ? 110 : lanes <= 6 ? 76 : 46)
/** Leaves room for half a name beside the outermost dots. */
const EDGE = 24
/** Overlays this small name every node. */
const NAME_ALL = 14
const MAX_NAMES = 40

interface Frame {
  left: number
  right: number
  top: number
  labelHeight: number
  radius: number
  /** Of two dots in a row. */
  step: number
  /** Of two rows. */
  rowStep: number
  /** Where the lanes' labels end. */
  margin: number
}

/** Where everything of the stretch view goes: the same input gives the same drawing. */
export function layoutStretch(input: StretchInput): StretchLayout {
  const frame = frameOf(input)
  const valued = input.nodes.some((n) => n.value !== null)
  const parkedNodes = valued ? input.nodes.filter((n) => n.value === null) : []
  const parkWidth = parkedNodes.length > 0 ? Math.min(110, input.width * 0.2) : 0
  const right = frame.right - (parkWidth > 0 ? parkWidth + 18 : 0)

  const lanes: Lane[] = []
  const dots: Dot[] = []
  let y = frame.top
  const groups = groupLanes(input.nodes, input.laneKey, input.sided)
  const at = valued ? axisPositions(input.nodes, input.sided) : evenly(groups)
  for (const group of groups) {
    const packed = packGroup(group, at, { ...frame, right }, parkWidth, input.sided)
    const rows = Math.max(1, ...packed.map((p) => p.row + 1))
    const height =
      Math.max(laneHeight(groups.length), rows * frame.rowStep + 2 * LANE_PAD) + frame.labelHeight
    const middle = y + frame.labelHeight + (height - frame.labelHeight) / 2
    lanes.push({ label: group.label, top: y, height })
    for (const p of packed) {
      dots.push(dotOf(p, middle + (p.row - (p.rows - 1) / 2) * frame.rowStep, frame.radius, valued, input))
    }
    y += height
  }
  dots.sort((p, q) => Number(p.parked) - Number(q.parked) || p.x - q.x || p.y - q.y)
  const height = Math.max(y + 6, 120)
  const parkingLeft = right + 18
  return {
    ...drawLinks(
      input,
      dots,
      { left: frame.margin, top: 0, right: input.width, bottom: height },
      lanes,
      frame,
    ),
    width: input.width,
    height,
    lanes,
    dots,
    parking: parkWidth > 0 ? { left: parkingLeft - 12, label: parkingLabel(parkingLeft) } : null,
    dotRadius: frame.radius,
  }
}

function frameOf(input: StretchInput): Frame {
  const narrow = input.width < NARROW_PX
  const count = input.nodes.length
  const radius = count > 1200 ? 2.5 : count > 400 ? 3.5 : narrow || count > 150 ? 4.5 : 5.5
  const labels = input.laneKey !== null
  const longest = Math.max(0, ...input.nodes.map((n) => n.labels[input.laneKey ?? '']?.length ?? 0))
  const margin = labels && !narrow ? Math.min(170, Math.max(70, textWidth('x'.repeat(longest), 14) + 20)) : 0
  return {
    left: margin + EDGE + radius,
    right: input.width - EDGE - radius,
    top: 18,
    labelHeight: labels && narrow ? 22 : 0,
    radius,
    step: 2 * radius + (count > 400 ? 2 : 4),
    rowStep: 2 * radius + (count > 400 ? 2 : count > 150 ? 4 : 7),
    margin,
  }
}

interface PackedNode extends Packed {
  node: StretchNode
  /** Rows of the group it was packed with. */
  rows: number
  parked: boolean
}

/** Sides are packed apart, so that no crowd spills over the gap. */
function packGroup(
  group: LaneGroup,
  at: ReadonlyMap<string, number>,
  frame: Frame,
  parkWidth: number,
  sided: boolean,
): PackedNode[] {
  const width = frame.right - frame.left
  const middle = (frame.left + frame.right) / 2
  const clear = sided ? width * 0.06 : 0
  const spaces = [
    {
      of: (n: StretchNode) => at.has(n.name) && (!sided || n.side === null),
      left: frame.left,
      right: frame.right,
    },
    {
      of: (n: StretchNode) => at.has(n.name) && sided && n.side === 'a',
      left: frame.left,
      right: middle - clear,
    },
    {
      of: (n: StretchNode) => at.has(n.name) && sided && n.side === 'b',
      left: middle + clear,
      right: frame.right,
    },
    { of: (n: StretchNode) => !at.has(n.name), left: frame.right + 24, right: frame.right + 18 + parkWidth },
  ]
  const byName = new Map(group.nodes.map((n) => [n.name, n]))
  const packs = spaces.map((space) => {
    const items = group.nodes
      .filter(space.of)
      .map((n) => ({ id: n.name, x: frame.left + (at.get(n.name) ?? 0) * width }))
    return packLane(items, { left: space.left, right: space.right, step: frame.step })
  })
  // Nodes on no side share the middle with both: they get rows of their own below.
  const shift = sided ? Math.max(packs[1]?.rows ?? 0, packs[2]?.rows ?? 0) : 0
  const loose = packs[0]?.rows ?? 0
  return packs.flatMap((pack, k) =>
    pack.placed.flatMap((p) => {
      const node = byName.get(p.id)
      const own = k === 0 ? { row: p.row + shift, rows: loose + shift } : { row: p.row, rows: pack.rows }
      const rows = k > 0 && k < 3 && loose > 0 ? shift + loose : own.rows
      return node ? [{ ...p, ...own, rows, node, parked: k === 3 }] : []
    }),
  )
}

function dotOf(p: PackedNode, y: number, radius: number, valued: boolean, input: StretchInput): Dot {
  const side = input.sided ? p.node.side : null
  return {
    x: p.x,
    y,
    node: p.node,
    radius,
    side,
    shape: side === 'b' ? 'square' : 'round',
    unheard: p.node.state === 'unheard',
    parked: p.parked || !valued,
  }
}

/** Before any value is known: by name, evenly over each lane. */
function evenly(groups: readonly LaneGroup[]): Map<string, number> {
  return new Map(
    groups.flatMap(({ nodes }) => {
      const names = nodes.map((n) => n.name).sort()
      return names.map((name, i) => [name, (i + 0.5) / names.length] as const)
    }),
  )
}

function drawLinks(
  input: StretchInput,
  dots: readonly Dot[],
  bounds: Box,
  lanes: readonly Lane[],
  frame: Frame,
): Pick<StretchLayout, 'faint' | 'taut' | 'bundle' | 'names'> {
  const byName = new Map(dots.map((d) => [d.node.name, d]))
  const crossing = input.sided ? input.links.filter((l) => l.crossing) : []
  const over = new Set(crossing)
  const within = input.links.filter((l) => !over.has(l) && l.state === 'live')
  const hidden = input.sided ? Math.max(0, (input.crossingLinks ?? 0) - crossing.length) : 0
  const occupied = new Occupied(dots, bounds, frame.labelHeight > 0 ? lanes.map(laneLabelBox) : [])
  const lines = tautLinks(crossing, byName)
  const named = lines.map((t) => t.curve)
  const bundle = bundleOf({ count: hidden, named, silent: input.silent }, dots, occupied)
  const taut = tagLinks(lines, occupied)
  const ends = new Set(crossing.flatMap((l) => [l.a, l.b]))
  const toName = dots.length <= NAME_ALL ? dots : dots.filter((d) => ends.has(d.node.name))
  const names = nameDots(toName.slice(0, MAX_NAMES), occupied, named)
  return { faint: faintPath(within, byName), taut, bundle, names }
}

function laneLabelBox(lane: Lane): Box {
  return { left: 0, right: textWidth(lane.label, 14), top: lane.top, bottom: lane.top + 20 }
}

function parkingLabel(left: number) {
  const at = { x: left, y: 9 }
  return {
    ...at,
    text: 'no value',
    anchor: 'start' as const,
    box: boxAround(at, textWidth('no value', NAME_PX), NAME_PX),
  }
}
