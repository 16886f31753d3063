/** Events in order of time, first come first served at equal times. */
export class EventQueue {
  private readonly heap: { atMs: number; order: number; run: () => void }[] = []
  private order = 0

  push(atMs: number, run: () => void): void {
    const { heap } = this
    let index = heap.length
    const entry = { atMs, order: this.order++, run }
    heap.push(entry)
    while (index > 0) {
      const parent = (index - 1) >> 1
      if (!before(entry, heap[parent]!)) break
      heap[index] = heap[parent]!
      index = parent
    }
    heap[index] = entry
  }

  /** Time of the next event, or Infinity. */
  get nextAtMs(): number {
    return this.heap[0]?.atMs ?? Number.POSITIVE_INFINITY
  }

  pop(): { atMs: number; run: () => void } | undefined {
    const { heap } = this
    const first = heap[0]
    const last = heap.pop()
    if (!first || !last || heap.length === 0) return first
    let index = 0
    for (;;) {
      let child = 2 * index + 1
      if (child >= heap.length) break
      if (child + 1 < heap.length && before(heap[child + 1]!, heap[child]!)) child++
      if (!before(heap[child]!, last)) break
      heap[index] = heap[child]!
      index = child
    }
    heap[index] = last
    return first
  }
}

function before(a: { atMs: number; order: number }, b: { atMs: number; order: number }): boolean {
  return a.atMs < b.atMs || (a.atMs === b.atMs && a.order < b.order)
}
