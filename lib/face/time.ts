const STEPS = [
  { seconds: 86_400, unit: 'd' },
  { seconds: 3_600, unit: 'h' },
  { seconds: 60, unit: 'min' },
  { seconds: 1, unit: 's' },
] as const

/** "12 s ago", "in 3 h", "now". Rounded down: an age is never overstated, a wait never shortened by a step. */
export function formatRelative(atMs: number, nowMs: number): string {
  const seconds = Math.round((nowMs - atMs) / 1000)
  const text = formatDuration(Math.abs(seconds))
  if (Math.abs(seconds) < 1) return 'now'
  return seconds > 0 ? `${text} ago` : `in ${text}`
}

export function formatDuration(seconds: number): string {
  const step = STEPS.find((s) => seconds >= s.seconds)
  return step ? `${Math.floor(seconds / step.seconds)} ${step.unit}` : '0 s'
}

export interface ClockStyle {
  /** IANA zone; the reader's own where left out. */
  timeZone?: string
}

/** "11:46" for the day of `nowMs`, "12 Mar 11:46" for others, with the year when it is another one. */
export function formatMoment(atMs: number, nowMs: number, style: ClockStyle = {}): string {
  const at = parts(atMs, style)
  const now = parts(nowMs, style)
  const clock = `${at.hour}:${at.minute}`
  if (at.year !== now.year) return `${at.day} ${at.month} ${at.year} ${clock}`
  if (at.day !== now.day || at.month !== now.month) return `${at.day} ${at.month} ${clock}`
  return clock
}

/** The whole moment, for titles: "12 Mar 2031 11:46:07". */
export function formatExact(atMs: number, style: ClockStyle = {}): string {
  const at = parts(atMs, style)
  return `${at.day} ${at.month} ${at.year} ${at.hour}:${at.minute}:${at.second}`
}

function parts(atMs: number, style: ClockStyle) {
  const format = new Intl.DateTimeFormat('en-GB', {
    year: 'numeric',
    month: 'short',
    day: 'numeric',
    hour: '2-digit',
    minute: '2-digit',
    second: '2-digit',
    hourCycle: 'h23',
    timeZone: style.timeZone,
  })
  const found = new Map(format.formatToParts(atMs).map((p) => [p.type, p.value]))
  const get = (type: Intl.DateTimeFormatPartTypes) => found.get(type) ?? ''
  return {
    year: get('year'),
    month: get('month'),
    day: get('day'),
    hour: get('hour'),
    minute: get('minute'),
    second: get('second'),
  }
}
