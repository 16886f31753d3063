import { describe, expect, it } from 'vitest'
import { quietHoursSchema } from '@/lib/notify/channel'
import { quietUntil } from '@/lib/notify/quiet'

// Changes of clocks: IANA tz database, as in the runtime's ICU. Each offset is written out.
const ms = (text: string) => Date.parse(text)
const hours = (from: string, to: string, zone: string) => ({ from, to, zone })
const night = (zone: string) => hours('22:00', '07:00', zone)

describe('quiet hours', () => {
  const table: [string, ReturnType<typeof hours>, string, string | null][] = [
    ['have not begun a moment before', night('Europe/Berlin'), '2026-07-01T21:59:59.999+02:00', null],
    [
      'begin at their time and end in the morning after',
      night('Europe/Berlin'),
      '2026-07-01T22:00+02:00',
      '2026-07-02T07:00+02:00',
    ],
    [
      'go on after midnight',
      night('Europe/Berlin'),
      '2026-07-02T06:59:59.999+02:00',
      '2026-07-02T07:00+02:00',
    ],
    ['have ended at their end', night('Europe/Berlin'), '2026-07-02T07:00+02:00', null],
    [
      'may lie within a day',
      hours('13:00', '14:30', 'Europe/Berlin'),
      '2026-07-01T14:00+02:00',
      '2026-07-01T14:30+02:00',
    ],
    [
      'that lie within a day are over in its evening',
      hours('13:00', '14:30', 'Europe/Berlin'),
      '2026-07-01T22:00+02:00',
      null,
    ],
    [
      'are an hour shorter in the night in which clocks go forward',
      night('Europe/Berlin'),
      '2026-03-28T22:00+01:00',
      '2026-03-29T07:00+02:00',
    ],
    [
      'are an hour longer in the night in which they go back',
      night('Europe/Berlin'),
      '2026-10-24T22:00+02:00',
      '2026-10-25T07:00+01:00',
    ],
    [
      'likewise in America in spring',
      night('America/New_York'),
      '2026-03-07T23:00-05:00',
      '2026-03-08T07:00-04:00',
    ],
    [
      'likewise in America in autumn',
      night('America/New_York'),
      '2026-10-31T23:00-04:00',
      '2026-11-01T07:00-05:00',
    ],
    [
      'that end at a time that does not exist end as much later',
      hours('22:00', '02:30', 'Europe/Berlin'),
      '2026-03-28T23:00+01:00',
      '2026-03-29T03:30+02:00',
    ],
    [
      'that end at a time that comes twice end at the first',
      hours('22:00', '02:30', 'Europe/Berlin'),
      '2026-10-24T23:00+02:00',
      '2026-10-25T02:30+02:00',
    ],
    [
      'and do not begin again for the second',
      hours('22:00', '02:30', 'Europe/Berlin'),
      '2026-10-25T02:15+01:00',
      null,
    ],
    [
      'that begin at a time that comes twice begin at the first',
      hours('02:30', '06:00', 'Europe/Berlin'),
      '2026-10-25T02:30+02:00',
      '2026-10-25T06:00+01:00',
    ],
    [
      'that the change swallows whole are left out',
      hours('02:30', '03:00', 'Europe/Berlin'),
      '2026-03-29T03:15+02:00',
      null,
    ],
    [
      'keep to a clock at +05:45',
      night('Asia/Kathmandu'),
      '2026-07-01T22:00+05:45',
      '2026-07-02T07:00+05:45',
    ],
    [
      'keep to clocks that move by half an hour',
      night('Australia/Lord_Howe'),
      '2026-10-03T23:00+10:30',
      '2026-10-04T07:00+11:00',
    ],
    [
      'keep to clocks at +12:45 and +13:45',
      night('Pacific/Chatham'),
      '2026-09-26T23:00+12:45',
      '2026-09-27T07:00+13:45',
    ],
    [
      'from a time to the same are the whole day',
      hours('07:00', '07:00', 'Europe/Berlin'),
      '2026-07-01T06:00+02:00',
      '2026-07-01T07:00+02:00',
    ],
  ]
  it.each(table)('%s', (_name, quiet, at, until) => {
    const found = quietUntil(quiet, ms(at))
    expect(found === null ? null : new Date(found).toISOString()).toBe(
      until === null ? null : new Date(until).toISOString(),
    )
  })

  it('that follow one another leave no moment out, over every change of a year', () => {
    for (const zone of ['Europe/Berlin', 'America/New_York', 'Australia/Lord_Howe', 'Pacific/Chatham'])
      for (let atMs = ms('2026-01-01T00:00Z'); atMs < ms('2027-01-01T00:00Z'); atMs += 17 * 3_600_000) {
        const inNight = quietUntil(night(zone), atMs)
        const inDay = quietUntil(hours('07:00', '22:00', zone), atMs)
        expect([inNight, inDay].filter((until) => until !== null && until > atMs)).toHaveLength(1)
      }
  })

  it('are in a zone by its name, in which clocks may change', () => {
    const isRead = (zone: string) => quietHoursSchema.safeParse(night(zone)).success
    expect(['Europe/Berlin', 'UTC', 'Europe/Nowhere', '+01:00', ''].map(isRead)).toEqual([
      true,
      true,
      false,
      false,
      false,
    ])
  })
})
