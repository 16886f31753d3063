/** "2026-11-20 01:04:07" in a time zone; the date always, as reports are read long after. */
export function stamp(atMs: number, timeZone: string): string {
  const format = new Intl.DateTimeFormat('en-GB', {
    timeZone,
    year: 'numeric',
    month: '2-digit',
    day: '2-digit',
    hour: '2-digit',
    minute: '2-digit',
    second: '2-digit',
    hourCycle: 'h23',
  })
  const found = new Map(format.formatToParts(atMs).map(({ type, value }) => [type, value]))
  const get = (type: Intl.DateTimeFormatPartTypes) => found.get(type) ?? ''
  return `${get('year')}-${get('month')}-${get('day')} ${get('hour')}:${get('minute')}:${get('second')}`
}

export function isZone(zone: string): boolean {
  try {
    return new Intl.DateTimeFormat('en-GB', { timeZone: zone }).resolvedOptions().timeZone !== ''
  } catch {
    return false
  }
}
