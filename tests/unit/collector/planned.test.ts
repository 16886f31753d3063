import { describe, expect, it } from 'vitest'
import { followPlan, type PlanFacts, type PlanRow, SETTLED_MS } from '@/lib/collector/planned'

const row: PlanRow = { id: 'p', a: 'eel-09', b: 'tar-01', degreeA: 3, degreeB: 4, joinedAtMs: null }
const now: PlanFacts = { atMs: 1_000_000, fresh: 0.2, linked: false, degreeA: 3, degreeB: 4 }

describe('a planned link', () => {
  it.each<[string, Partial<PlanRow>, Partial<PlanFacts>, ReturnType<typeof followPlan>]>([
    ['notes the reading while it is not there', {}, {}, { before: { atMs: 1_000_000, lambda2: 0.2 } }],
    ['notes none that is not fresh', {}, { fresh: null }, null],
    ['is seen when it is named', {}, { linked: true }, { joined: { atMs: 1_000_000, by: 'named' } }],
    [
      'is seen by both degrees where links are not named',
      {},
      { linked: null, degreeA: 4, degreeB: 5 },
      { joined: { atMs: 1_000_000, by: 'degrees' } },
    ],
    [
      'is not seen by one degree alone',
      {},
      { linked: null, degreeA: 4 },
      { before: { atMs: 1_000_000, lambda2: 0.2 } },
    ],
    [
      'is not seen by degrees where links are named, and this one is not',
      {},
      { degreeA: 9, degreeB: 9 },
      { before: { atMs: 1_000_000, lambda2: 0.2 } },
    ],
    ['waits for the reading to settle', { joinedAtMs: 1_000_000 - SETTLED_MS + 1 }, { linked: true }, null],
    [
      'notes the reading once it has',
      { joinedAtMs: 1_000_000 - SETTLED_MS },
      { linked: true },
      { after: { atMs: 1_000_000, lambda2: 0.2 } },
    ],
    ['notes none after it has gone again', { joinedAtMs: 0 }, { linked: false }, null],
    [
      'notes it by the operator’s word where links are not named',
      { joinedAtMs: 0 },
      { linked: null },
      { after: { atMs: 1_000_000, lambda2: 0.2 } },
    ],
  ])('%s', (_, of, facts, expected) =>
    expect(followPlan({ ...row, ...of }, { ...now, ...facts })).toEqual(expected),
  )
})
