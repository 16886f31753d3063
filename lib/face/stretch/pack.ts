export interface Item {
  id: string
  /** Where it wants to be, in pixels. */
  x: number
}

export interface Packed {
  id: string
  x: number
  /** Row in the lane, 0 at the top. */
  row: number
}

export interface PackSpace {
  left: number
  right: number
  /** Least distance of two centres in a row; rows are as far apart. */
  step: number
}

/** Rows a lane of so many nodes may grow to before nodes give way sideways. */
function rowLimit(count: number, capacity: number): number {
  return Math.max(Math.min(3, count), Math.ceil(Math.sqrt(count * 0.8)), Math.ceil(count / capacity))
}

/**
 * Sets items into rows so that none overlaps another: first where there is room at the very place, else in the row
 * that is free soonest; then each row is spread with least squared displacement. The same input gives the same
 * drawing whatever its order.
 */
export function packLane(items: readonly Item[], space: PackSpace): { placed: Packed[]; rows: number } {
  if (items.length === 0) return { placed: [], rows: 0 }
  const capacity = Math.max(1, Math.floor((space.right - space.left) / space.step) + 1)
  const sorted = [...items].sort((p, q) => p.x - q.x || (p.id < q.id ? -1 : 1))
  const limit = rowLimit(items.length, capacity)
  const rows: { items: Item[]; free: number }[] = []

  for (const [i, item] of sorted.entries()) {
    const row = chooseRow(rows, item, i, limit, capacity)
    row.items.push(item)
    row.free = Math.max(item.x, row.free) + space.step
  }
  const placed = rows.flatMap((row, r) =>
    spread(
      row.items.map((i) => i.x),
      space,
    ).map((x, k) => ({ id: row.items[k]?.id ?? '', x, row: r })),
  )
  return { placed, rows: rows.length }
}

function chooseRow(
  rows: { items: Item[]; free: number }[],
  item: Item,
  turn: number,
  limit: number,
  capacity: number,
): { items: Item[]; free: number } {
  const open = rows.filter((r) => r.items.length < capacity)
  // Taking the rows in turn staggers sparse lanes, where links would else run through other nodes.
  const fits = open.filter((r) => r.free <= item.x)
  const staggered = Math.min(3, limit)
  if (rows.length < staggered && (fits.length === 0 || turn < staggered)) return add(rows)
  const fit = fits.reduce<(typeof fits)[number] | null>(
    (m, r) => (m === null || r.free < m.free ? r : m),
    null,
  )
  if (fit) return fit
  if (rows.length < limit) return add(rows)
  return open.reduce((m, r) => (r.free < m.free ? r : m), open[0] ?? add(rows))
}

function add(rows: { items: Item[]; free: number }[]): { items: Item[]; free: number } {
  const row = { items: [], free: Number.NEGATIVE_INFINITY }
  rows.push(row)
  return row
}

/**
 * Positions nearest to `wanted` (ascending) in the least-squares sense with neighbours at least one step apart:
 * pool-adjacent-violators on wanted[i] − i·step (isotonic regression; from memory), then kept inside the space.
 */
export function spread(wanted: readonly number[], space: PackSpace): number[] {
  const blocks: { sum: number; count: number }[] = []
  for (const [i, x] of wanted.entries()) {
    blocks.push({ sum: x - i * space.step, count: 1 })
    for (;;) {
      const last = blocks.at(-1)
      const before = blocks.at(-2)
      if (!last || !before || before.sum / before.count <= last.sum / last.count) break
      blocks.splice(-2, 2, { sum: before.sum + last.sum, count: before.count + last.count })
    }
  }
  const highest = Math.max(space.left, space.right - (wanted.length - 1) * space.step)
  const base = blocks.flatMap((b) => Array.from({ length: b.count }, () => b.sum / b.count))
  return base.map((y, i) => Math.min(highest, Math.max(space.left, y)) + i * space.step)
}
