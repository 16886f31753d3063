import { describe, expect, it } from 'vitest'
import { CLEAR, type Condition, type RuleState, step } from '@/lib/warn/hysteresis'

/** H holds, b between, o over, ? unknown; a letter for each 10 s. R: raised, C: cleared, a dot where nothing changes. */
const LETTERS: Record<string, Condition> = { H: 'holds', b: 'between', o: 'over', '?': 'unknown' }

function run(sequence: string, delays: { onDelaySeconds: number; offDelaySeconds: number }): string {
  let state: RuleState = CLEAR
  return [...sequence]
    .map((letter, index) => {
      const next = step(state, LETTERS[letter]!, { ...delays, atMs: index * 10_000 })
      state = next.state
      return next.transition === null ? '.' : next.transition === 'raised' ? 'R' : 'C'
    })
    .join('')
}

describe('a rule', () => {
  it.each([
    ['is raised at once without a delay, and once', 0, 0, 'HHH', 'R..'],
    ['waits for the on-delay', 20, 0, 'HHHH', '..R.'],
    ['begins anew where the condition was over meanwhile', 20, 0, 'HHoHHH', '.....R'],
    ['begins anew where it was between: it does not hold', 20, 0, 'HHbHHH', '.....R'],
    ['waits on where nothing is known, no longer than it would have', 20, 0, 'H?H', '..R'],
    ['is not raised by what is not known', 20, 0, 'H????', '.....'],
    ['is cleared after the off-delay', 0, 20, 'Hooo', 'R..C'],
    ['is not cleared between the limit and its margin', 0, 0, 'Hbbb', 'R...'],
    ['is not cleared by what is not known', 0, 0, 'H???', 'R...'],
    ['begins the off-delay anew where it holds again', 0, 20, 'HooHooo', 'R.....C'],
    ['begins the off-delay anew where nothing is known', 0, 20, 'Hoo?ooo', 'R.....C'],
    ['is raised and cleared again and again', 0, 0, 'HoHoH', 'RCRCR'],
  ])('%s', (_name, onDelaySeconds, offDelaySeconds, sequence, transitions) => {
    expect(run(sequence, { onDelaySeconds, offDelaySeconds })).toBe(transitions)
  })
})
