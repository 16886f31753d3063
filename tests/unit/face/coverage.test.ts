import { describe, expect, it } from 'vitest'
import type { Reading } from '@/lib/data/dto'
import { coverageMeaning, coverageParts } from '@/lib/face/coverage'
import { linkKindWords } from '@/lib/face/link-kind'

const last = { at: '2031-03-12T11:46:00.000Z', lambda2: 0.238 }
const full = { linksKnown: 118, linksMeasured: 118, joined: 36, heard: 36, unheard: 0 }
const told = (coverage: Partial<Reading['coverage']>, seen: Reading['last'] = last) =>
  coverageParts({ coverage: { ...full, ...coverage }, last: seen }).map(({ text, grave, strong }) =>
    [text, grave && 'grave', strong && 'strong'].filter(Boolean).join(' | '),
  )
const meaning = (coverage: Partial<Reading['coverage']>) =>
  coverageMeaning({ coverage: { ...full, ...coverage } })

describe('coverage', () => {
  it('is a line without warning while it is full', () => {
    expect(told({})).toEqual(['36 of 36 agents heard', '118 of 118 links measured'])
    expect(meaning({})).toBeNull()
  })

  it('says what is short of full, and what that means', () => {
    expect(told({ linksMeasured: 112, withoutAgent: 4, leftOut: 1 })).toEqual([
      '36 of 36 agents heard',
      '112 of 118 links measured | strong',
      '4 neighbours without an agent | strong',
      '1 agent left out | strong',
    ])
    expect(meaning({ linksMeasured: 112, withoutAgent: 4, leftOut: 1 })).toBe(
      'Links that no agent measures are not in the reading: with 2\u202f% of neighbours without an agent, here and there, computed readings stood between 0.7 and 1.1 times that of the whole in 9 of 10 cases. A false calm is possible: where up to half of the nodes, all at one side of a cut, had none, one in 20 stood over 15 times too high. The figures of one agent did not hold, so the reading does without that part of the overlay.',
    )
  })

  it('says how far off readings were with as many agents unheard, and no number where none was measured', () => {
    const missing = 'What unheard agents would say is missing, and nothing is filled in for them'
    expect(meaning({ heard: 33, unheard: 3 })).toBe(
      `${missing}: with 3 of 36 unheard, simulated readings stood between 0.4 and 1.2 times the true value in 9 of 10 cases.`,
    )
    expect(meaning({ heard: 35, unheard: 1 })).toContain(
      'with 1 of 36 unheard, simulated readings stood between 0.7 and 1.1',
    )
    expect(meaning({ heard: 18, unheard: 18 })).toBe(`${missing}.`)
  })

  it('says how far off readings were with as many neighbours without an agent, down to nothing', () => {
    const calm = 'the overlay can be weaker there than it says, and a false calm is possible.'
    expect(meaning({ linksMeasured: 88, withoutAgent: 60 })).toContain(
      'with 25\u202f% of neighbours without an agent, here and there, computed readings stood at most 1.0 times that of the whole',
    )
    expect(meaning({ linksMeasured: 53, withoutAgent: 130 })).toContain(calm)
    expect(meaning({ linksMeasured: 112 })).toContain(calm)
  })

  it('is red for what is unheard, but not before anything was heard', () => {
    expect(told({ heard: 18, unheard: 18 })[0]).toBe('18 of 36 agents heard | grave')
    expect(told({ heard: 0, unheard: 36 }, null)[0]).toBe('0 of 36 agents heard')
  })
})

describe('what the links measured are', () => {
  it('has a short name and one sentence for each, and nothing where no agent says', () => {
    for (const kind of ['path', 'path-with-view', 'connection', 'mixed'] as const)
      expect(linkKindWords(kind)?.sentence).toMatch(/^[A-Z].*\.$/)
    expect(linkKindWords('path')?.sentence).toContain('beside the overlay’s own connections')
    expect([linkKindWords(null), linkKindWords(undefined)]).toEqual([null, null])
  })
})
