import { describe, expect, it } from 'vitest'
import {
  holderAt,
  nextHandOver,
  type StandInSpan,
  spanAt,
  type WeeklyTurn,
  weeksFrom,
  withoutPerson,
} from '@/lib/warn/turns'

// Changes of clocks: IANA tz database, as in the runtime's ICU. Each offset is written out in the expected moment.
const ms = (text: string) => Date.parse(text)
const utc = (atMs: number) => new Date(atMs).toISOString().replace(':00.000Z', 'Z')

/** Monday 09:00 in Berlin, three people. */
const harbour: WeeklyTurn = {
  zone: 'Europe/Berlin',
  handOverWeekday: 1,
  handOverHour: 9,
  startsOn: '2026-03-02',
  userIds: ['quill', 'ferrier', 'stave'],
}
const with_ = (changes: Partial<WeeklyTurn>): WeeklyTurn => ({ ...harbour, ...changes })

describe('whose week it is', () => {
  const table: [string, WeeklyTurn, string, string | null][] = [
    ['nobody’s before the first week', harbour, '2026-03-02T08:59:59.999+01:00', null],
    ['the first’s from the hand-over on', harbour, '2026-03-02T09:00+01:00', 'quill'],
    [
      'the first’s to the last moment before the next hand-over',
      harbour,
      '2026-03-09T08:59:59.999+01:00',
      'quill',
    ],
    ['the second’s from then on', harbour, '2026-03-09T09:00+01:00', 'ferrier'],
    ['the first’s again after the last', harbour, '2026-03-23T09:00+01:00', 'quill'],
    [
      'told by the hour of the clock after it went forward',
      harbour,
      '2026-03-30T08:59:59.999+02:00',
      'quill',
    ],
    ['handed over a real hour earlier then', harbour, '2026-03-30T09:00+02:00', 'ferrier'],
    ['told by the hour of the clock after it went back', harbour, '2026-10-26T08:59:59.999+01:00', 'quill'],
    ['handed over a real hour later then', harbour, '2026-10-26T09:00+01:00', 'ferrier'],
    [
      'counted from the hand-over before, where it starts in mid-week',
      with_({ startsOn: '2026-03-05' }),
      '2026-03-02T09:00+01:00',
      'quill',
    ],
    [
      'counted from that day on Sundays too',
      with_({ startsOn: '2026-03-08' }),
      '2026-03-09T09:00+01:00',
      'ferrier',
    ],
    ['nobody’s where nobody is listed', with_({ userIds: [] }), '2026-04-01T12:00Z', null],
    [
      'always the same person’s where there is only one',
      with_({ userIds: ['quill'] }),
      '2031-07-01T00:00Z',
      'quill',
    ],
  ]
  it.each(table)('is %s', (_name, turn, at, holder) => expect(holderAt(turn, [], ms(at))).toBe(holder))
})

describe('a hand-over at a change of clocks', () => {
  const weekOf = (zone: string, weekday: number, hour: number, startsOn: string, count = 3): string[] => {
    const turn = { zone, handOverWeekday: weekday, handOverHour: hour, startsOn, userIds: ['quill', 'stave'] }
    const from = weeksFrom(turn, ms(`${startsOn}T00:00Z`) - 14 * 86_400_000, count)
    return from.map(({ startsAtMs }) => utc(startsAtMs))
  }
  const table: [string, string[], string[]][] = [
    [
      'in Europe in spring, at an hour that does not exist, is an hour later by the new clock',
      weekOf('Europe/Berlin', 7, 2, '2026-03-22'),
      ['2026-03-22T01:00Z', '2026-03-29T01:00Z', '2026-04-05T00:00Z'],
    ],
    [
      'in Europe in autumn, at an hour that comes twice, is at the first',
      weekOf('Europe/Berlin', 7, 2, '2026-10-18'),
      ['2026-10-18T00:00Z', '2026-10-25T00:00Z', '2026-11-01T01:00Z'],
    ],
    [
      'in America in spring, likewise',
      weekOf('America/New_York', 7, 2, '2026-03-01'),
      ['2026-03-01T07:00Z', '2026-03-08T07:00Z', '2026-03-15T06:00Z'],
    ],
    [
      'in America in autumn, likewise',
      weekOf('America/New_York', 7, 1, '2026-10-25'),
      ['2026-10-25T05:00Z', '2026-11-01T05:00Z', '2026-11-08T06:00Z'],
    ],
    [
      'at a midnight that does not exist, in Santiago, is at one o’clock',
      weekOf('America/Santiago', 7, 0, '2026-08-30'),
      ['2026-08-30T04:00Z', '2026-09-06T04:00Z', '2026-09-13T03:00Z'],
    ],
    [
      'where clocks move by half an hour, on Lord Howe Island, is half an hour later by the new clock',
      weekOf('Australia/Lord_Howe', 7, 2, '2026-09-27'),
      ['2026-09-26T15:30Z', '2026-10-03T15:30Z', '2026-10-10T15:00Z'],
    ],
    [
      'at +12:45 and +13:45, on the Chatham Islands, keeps to their clock',
      weekOf('Pacific/Chatham', 1, 9, '2026-09-21'),
      ['2026-09-20T20:15Z', '2026-09-27T19:15Z', '2026-10-04T19:15Z'],
    ],
    [
      'at +05:45, in Kathmandu, where clocks do not change, comes every 168 hours',
      weekOf('Asia/Kathmandu', 1, 9, '2026-03-23'),
      ['2026-03-23T03:15Z', '2026-03-30T03:15Z', '2026-04-06T03:15Z'],
    ],
    [
      'on a day that was left out, in Apia in 2011, is a day later',
      weekOf('Pacific/Apia', 5, 9, '2011-12-23'),
      ['2011-12-23T19:00Z', '2011-12-30T19:00Z', '2012-01-05T19:00Z'],
    ],
  ]
  it.each(table)('%s', (_name, found, expected) => expect(found).toEqual(expected))

  it('is found from any moment of the weeks around it: holders follow one another without a gap', () => {
    for (const zone of ['Europe/Berlin', 'America/New_York', 'Australia/Lord_Howe', 'America/Santiago'])
      for (const handOverHour of [0, 2, 23])
        for (const handOverWeekday of [1, 7]) {
          const turn = with_({ zone, handOverHour, handOverWeekday, startsOn: '2026-01-07' })
          const weeks = weeksFrom(turn, ms('2026-01-07T12:00Z'), 52)
          weeks.forEach(({ startsAtMs, endsAtMs, userId }, index) => {
            expect(userId).toBe(turn.userIds[index % 3])
            expect(holderAt(turn, [], startsAtMs)).toBe(userId)
            expect(holderAt(turn, [], endsAtMs - 1)).toBe(userId)
            expect(nextHandOver(turn, startsAtMs)).toBe(endsAtMs)
            expect(nextHandOver(turn, startsAtMs - 1)).toBe(startsAtMs)
            expect(weeks[index + 1]?.startsAtMs ?? endsAtMs).toBe(endsAtMs)
          })
        }
  })

  it('makes weeks of 167 and of 169 hours', () => {
    const hours = weeksFrom(harbour, ms('2026-03-02T09:00+01:00'), 35).map(
      ({ startsAtMs, endsAtMs }) => (endsAtMs - startsAtMs) / 3_600_000,
    )
    expect([hours[3], hours[33], hours.filter((one) => one === 168).length]).toEqual([167, 169, 33])
  })
})

describe('the weeks to come', () => {
  it('begin with the one that is under way', () =>
    expect(
      weeksFrom(harbour, ms('2026-03-25T00:00Z'), 3).map(({ startsAtMs, endsAtMs, userId }) => [
        utc(startsAtMs),
        utc(endsAtMs),
        userId,
      ]),
    ).toEqual([
      ['2026-03-23T08:00Z', '2026-03-30T07:00Z', 'quill'],
      ['2026-03-30T07:00Z', '2026-04-06T07:00Z', 'ferrier'],
      ['2026-04-06T07:00Z', '2026-04-13T07:00Z', 'stave'],
    ]))

  it('begin with the first where it has not begun, which is the next hand-over then', () => {
    const before = ms('2026-01-01T00:00Z')
    expect(weeksFrom(harbour, before, 1)[0]).toMatchObject({ userId: 'quill' })
    expect(utc(nextHandOver(harbour, before))).toBe('2026-03-02T08:00Z')
  })
})

describe('a stand-in', () => {
  const span = (userId: string, from: string, to: string): StandInSpan => ({
    userId,
    startsAtMs: ms(from),
    endsAtMs: ms(to),
  })
  // Over the hand-over of Monday 30 March, 09:00 in Berlin, on the day after clocks went forward.
  const weekend = span('stave', '2026-03-28T18:00+01:00', '2026-03-30T12:00+02:00')
  const table: [string, StandInSpan[], string, string | null][] = [
    ['does not have it a moment before', [weekend], '2026-03-28T17:59:59.999+01:00', 'quill'],
    ['has it from the beginning', [weekend], '2026-03-28T18:00+01:00', 'stave'],
    ['keeps it over a hand-over', [weekend], '2026-03-30T09:00+02:00', 'stave'],
    ['gives it back to whoever’s week it is by then', [weekend], '2026-03-30T12:00+02:00', 'ferrier'],
    [
      'who began later goes before one who began earlier',
      [span('ferrier', '2026-03-29T00:00Z', '2026-03-29T12:00Z'), weekend],
      '2026-03-29T06:00Z',
      'ferrier',
    ],
    [
      'who began earlier has it again when the later one has ended',
      [span('ferrier', '2026-03-29T00:00Z', '2026-03-29T12:00Z'), weekend],
      '2026-03-29T12:00Z',
      'stave',
    ],
    [
      'of two who began together is the one entered last',
      [weekend, { ...weekend, userId: 'ferrier' }],
      '2026-03-29T06:00Z',
      'ferrier',
    ],
    [
      'may have it before the first week',
      [span('stave', '2026-01-01T00:00Z', '2026-01-02T00:00Z')],
      '2026-01-01T12:00Z',
      'stave',
    ],
  ]
  it.each(table)('%s', (_name, standIns, at, holder) =>
    expect(holderAt(harbour, standIns, ms(at))).toBe(holder),
  )

  const until = (turn: WeeklyTurn, standIns: StandInSpan[], at: string) => {
    const { userId, untilMs } = spanAt(turn, standIns, ms(at))
    return [userId, untilMs === null ? null : utc(untilMs)]
  }
  it('is what a turn is handed over to: the change that is said is the nearest real one', () => {
    expect(until(harbour, [], '2026-03-28T00:00Z')).toEqual(['quill', '2026-03-30T07:00Z'])
    expect(until(harbour, [weekend], '2026-03-28T00:00Z')).toEqual(['quill', '2026-03-28T17:00Z'])
    expect(until(harbour, [weekend], '2026-03-29T00:00Z')).toEqual(['stave', '2026-03-30T10:00Z'])
    // Ferrier stands in before a week of their own.
    const own = span('ferrier', '2026-03-29T00:00Z', '2026-03-30T07:00Z')
    expect(until(harbour, [own], '2026-03-29T12:00Z')).toEqual(['ferrier', '2026-04-06T07:00Z'])
    expect(until(with_({ userIds: ['quill'] }), [], '2026-03-28T00:00Z')).toEqual(['quill', null])
    expect(until(harbour, [], '2026-01-01T00:00Z')).toEqual([null, '2026-03-02T08:00Z'])
  })
})

describe('a turn that somebody leaves', () => {
  /** In the week of the second, Ferrier. */
  const at = ms('2026-03-11T12:00Z')
  const left = (userId: string, atMs = at) => ({ ...harbour, ...withoutPerson(harbour, userId, atMs) })
  const next = (turn: WeeklyTurn) => weeksFrom(turn, at, 4).map(({ userId }) => userId)

  it('keeps the week and the order of those who stay', () => {
    expect(next(harbour)).toEqual(['ferrier', 'stave', 'quill', 'ferrier'])
    expect(next(left('quill'))).toEqual(['ferrier', 'stave', 'ferrier', 'stave'])
    expect(next(left('stave'))).toEqual(['ferrier', 'quill', 'ferrier', 'quill'])
  })
  it('goes on with the next in order at once where it was their week', () =>
    expect(next(left('ferrier'))).toEqual(['stave', 'quill', 'stave', 'quill']))
  it('stays as it is where they were not in it', () => expect(left('nobody')).toEqual(harbour))
  it('has not begun any earlier for it', () =>
    expect(left('quill', ms('2026-01-01T00:00Z'))).toEqual(with_({ userIds: ['ferrier', 'stave'] })))
  it('is nobody’s when the last has left', () => {
    const alone = with_({ userIds: ['quill'] })
    expect(holderAt({ ...alone, ...withoutPerson(alone, 'quill', at) }, [], at)).toBeNull()
  })
})
