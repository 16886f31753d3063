import { describe, expect, it } from 'vitest'
import type { RehearsalDto } from '@/lib/data/rehearsal-dto'
import {
  compared,
  detailOf,
  headline,
  lastLine,
  NOTHING,
  progressText,
  stateWord,
} from '@/lib/face/rehearsal'
import { minutesAway, NOW, rehearsal } from './fixtures'

const office = { ...NOTHING, labels: [{ key: 'office', value: 'Eelholm' }] }
const waiting = { state: 'waiting', answer: null, startedAt: null, endedAt: null, reading: null } as const
const running = { state: 'running', answer: null, endedAt: null } as const

describe('the sentence of a rehearsal', () => {
  it.each<[Partial<RehearsalDto>, string]>([
    [{}, 'Yes: draining tar-01 and tar-02 holds – 0.842 would remain, floor 0.600.'],
    [{ floor: null }, 'Yes: draining tar-01 and tar-02 holds – 0.842 would remain.'],
    [
      { answer: 'below-floor', exclude: office, reading: { lambda2: 0.31, low: 0.3, high: 0.32 } },
      'No: draining all nodes with office Eelholm brings the reading below the floor – 0.310 would remain, floor 0.600.',
    ],
    [
      {
        answer: 'splits',
        exclude: { ...NOTHING, nodes: ['1', '2', '3', '4', '5'] },
        taken: 5,
        reading: null,
      },
      'No: draining 5 nodes splits the overlay.',
    ],
    [
      { answer: 'splits', exclude: { ...NOTHING, links: [['tar-01', 'eel-01']] } },
      'No: cutting tar-01 – eel-01 splits the overlay.',
    ],
    [
      { state: 'running', answer: 'below-floor', endedAt: null },
      'No: draining tar-01 and tar-02 brings the reading below the floor – 0.842 would remain, floor 0.600.',
    ],
    [running, 'Rehearsing: draining tar-01 and tar-02.'],
    [waiting, 'About to begin: draining tar-01 and tar-02.'],
    [
      { state: 'cancelled', answer: null },
      'Cancelled before there was an answer: draining tar-01 and tar-02.',
    ],
    [{ state: 'failed', answer: null }, 'No answer: draining tar-01 and tar-02 could not be rehearsed.'],
    [
      { state: 'running', answer: null, exclude: { ...office, links: [['tar-01', 'eel-01']] } },
      'Rehearsing: going without all nodes with office Eelholm and tar-01 – eel-01.',
    ],
  ])('says the answer first, or how far it is from one (%#)', (over, said) =>
    expect(headline(rehearsal(over), NOW)).toBe(said),
  )

  it('says for when one is planned', () =>
    expect(headline(rehearsal({ ...waiting, startsAt: minutesAway(90) }), NOW)).toMatch(
      /^Planned for (1[23] Mar )?\d\d:\d\d: draining tar-01 and tar-02\.$/,
    ))
})

it('what the server says beyond the answer stands below it', () => {
  const verdict = 'It does not hold. Without tar-01 the reading would be 0.31.'
  expect(detailOf(rehearsal({ answer: 'below-floor', verdict }))).toBe(
    'Without tar-01 the reading would be 0.31.',
  )
  expect(detailOf(rehearsal({ answer: null, state: 'failed' }))).toBeNull()
})

describe('how far it has come', () => {
  it.each<[Partial<RehearsalDto>, string | null]>([
    [{ ...running, endsInMs: 21_000 }, 'Walkers are out: about 25 s more.'],
    [{ ...running, endsInMs: null }, 'Walkers are out.'],
    [
      { state: 'running', answer: 'splits', endedAt: null, endsInMs: 150_000 },
      'The answer is known; an order in waves is being looked for: about 3 min more.',
    ],
    [waiting, 'Begins as soon as there is room: at most 3 run at once.'],
    [{ ...waiting, startsAt: minutesAway(90) }, 'Begins in 1 h.'],
    [{}, null],
  ])('is said in words (%#)', (over, said) => expect(progressText(rehearsal(over), NOW, 3)).toBe(said))

  it.each<[Partial<RehearsalDto>, string]>([
    [{}, 'holds'],
    [{ answer: 'below-floor' }, 'below the floor'],
    [{ answer: null }, 'no answer'],
    [running, 'running'],
    [waiting, 'waiting'],
    [{ ...waiting, startsAt: minutesAway(90) }, 'planned'],
    [{ state: 'failed', answer: null }, 'failed'],
  ])('is one word in the table (%#)', (over, word) => expect(stateWord(rehearsal(over))).toBe(word))
})

describe('live beside as it would be', () => {
  const beside = {
    level: 'firm' as const,
    sides: [
      { name: 'a' as const, nodes: 7 },
      { name: 'b' as const, nodes: 5 },
    ] as [{ name: 'a'; nodes: number }, { name: 'b'; nodes: number }],
    crossingLinks: 8,
    core: null,
    lambda2: 1.19,
    low: 1.18,
    high: 1.2,
  }
  it('rounds intervals outward and counts who is away', () =>
    expect(compared(rehearsal(), beside).map(({ id, live, would }) => [id, live, would])).toEqual([
      ['reading', '1.200', '0.842'],
      ['level', 'firm', 'firm'],
      ['nodes', '12', '10'],
      ['sides', 'a: 7 · b: 5', 'a: 6 · b: 4'],
      ['crossing', '8', '5'],
    ]))
  it('writes what the interval is of', () =>
    expect(compared(rehearsal(), beside)[0]).toMatchObject({
      liveRemark: '1.190–1.211',
      wouldRemark: '0.831–0.856',
    }))
  it('takes the live reading of the core until the rehearsal has one of its own', () =>
    expect(
      compared(rehearsal({ ...running, live: null }), {
        ...beside,
        core: { lambda2: 2, low: 1.9, high: 2.1 },
      })[0],
    ).toMatchObject({ live: '2.000', liveRemark: '1.900–2.100' }))
  it('has no reading where what remains falls apart, and says so', () => {
    const apart = rehearsal({
      answer: 'splits',
      level: 'split',
      reading: null,
      sides: null,
      crossingLinks: null,
    })
    expect(compared(apart, null)).toMatchObject([
      { id: 'reading', would: 'none' },
      { id: 'level', live: null, would: 'split', grave: true },
      { id: 'nodes' },
      { id: 'sides', live: null, would: 'none stand out' },
      { id: 'crossing', would: null },
    ])
  })
})

describe('the line on the first page', () => {
  it('is of the newest that was answered within a day, or is under way', () => {
    const old = rehearsal({ id: 'old', endedAt: minutesAway(-60 * 25) })
    const failed = rehearsal({ id: 'failed', state: 'failed', answer: null })
    expect(lastLine([failed, rehearsal(), old], NOW)).toEqual({
      id: 'r',
      text: 'Rehearsed 4 min ago. Yes: draining tar-01 and tar-02 holds – 0.842 would remain, floor 0.600.',
    })
    expect(lastLine([rehearsal({ id: 'now', ...running }), rehearsal()], NOW)).toEqual({
      id: 'now',
      text: 'Rehearsing: draining tar-01 and tar-02.',
    })
    expect(lastLine([failed, old], NOW)).toBeNull()
  })
})
