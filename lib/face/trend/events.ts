import { formatCount } from '@/lib/face/format'

export interface MomentEvent {
  id: string
  atSeconds: number
  text: string
}

export interface EventSpace {
  fromSeconds: number
  toSeconds: number
  /** Pixels of the plot the time axis runs over. */
  left: number
  right: number
  rows: number
  /** Mean advance of the font, in pixels. */
  charPx: number
}

export interface EventMark {
  id: string
  x: number
  row: number
  text: string
  anchor: 'start' | 'end'
  /** What the text takes up. */
  from: number
  to: number
}

/** Nearer than this and two marks would touch. */
const MARK_PX = 12
const TEXT_GAP = 7
const MAX_CHARS = 34

/**
 * Marks below the time axis with their words, none over another: near moments are counted together, words go to the
 * right or, where the edge is near, to the left, in the first row with room; what has no room joins the mark before.
 */
export function placeEvents(events: readonly MomentEvent[], space: EventSpace): EventMark[] {
  const { fromSeconds, toSeconds, left, right } = space
  const scale = (right - left) / (toSeconds - fromSeconds)
  const inside = events
    .filter((e) => e.atSeconds >= fromSeconds && e.atSeconds <= toSeconds)
    .sort((p, q) => p.atSeconds - q.atSeconds || (p.id < q.id ? -1 : 1))

  let groups: Group[] = []
  for (const event of inside) {
    const x = left + (event.atSeconds - fromSeconds) * scale
    const last = groups.at(-1)
    if (last && x - last.x < MARK_PX) last.events.push(event)
    else groups.push({ x, events: [event], brief: false })
  }
  for (;;) {
    const { marks, stuck } = tryRows(groups, space)
    if (stuck === null) return marks
    groups = merge(groups, stuck)
  }
}

interface Group {
  x: number
  events: MomentEvent[]
  /** Only counted, where its words are too long for the whole space. */
  brief: boolean
}

function tryRows(groups: readonly Group[], space: EventSpace): { marks: EventMark[]; stuck: number | null } {
  const ends = Array.from({ length: space.rows }, () => Number.NEGATIVE_INFINITY)
  const marks: EventMark[] = []
  for (const [i, group] of groups.entries()) {
    const text = words(group)
    const width = text.length * space.charPx + TEXT_GAP
    const mark = ends.flatMap((end, row) => {
      const toRight = { from: group.x - 5, to: group.x + width }
      const toLeft = { from: group.x - width, to: group.x + 5 }
      const fits = (s: { from: number; to: number }) => s.from >= end + 10 && s.to <= space.right + 6
      if (fits(toRight)) return { ...toRight, row, anchor: 'start' as const }
      if (fits(toLeft) && toLeft.from >= 0) return { ...toLeft, row, anchor: 'end' as const }
      return []
    })[0]
    if (!mark) return { marks, stuck: i }
    ends[mark.row] = mark.to
    marks.push({ ...mark, id: group.events[0]?.id ?? '', x: group.x, text })
  }
  return { marks, stuck: null }
}

function merge(groups: readonly Group[], at: number): Group[] {
  const group = groups[at]
  const before = groups[at - 1]
  if (!group) return [...groups]
  if (!before) return group.brief ? groups.slice(1) : [{ ...group, brief: true }, ...groups.slice(1)]
  return [
    ...groups.slice(0, at - 1),
    { ...before, events: [...before.events, ...group.events] },
    ...groups.slice(at + 1),
  ]
}

function words({ events, brief }: Group): string {
  const [only] = events
  if (brief || events.length !== 1 || !only) return formatCount(events.length, 'event')
  return only.text.length > MAX_CHARS ? `${only.text.slice(0, MAX_CHARS - 1)}…` : only.text
}
