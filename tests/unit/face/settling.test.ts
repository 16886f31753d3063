import { describe, expect, it } from 'vitest'
import { answerText, settlingText } from '@/lib/face/settling'

describe('a settling reading', () => {
  it.each([
    [37_400, 'Settling: about 40 s more.'],
    [40_000, 'Settling: about 40 s more.'],
    [300, 'Settling: about 5 s more.'],
    [121_000, 'Settling: about 3 min more.'],
    [null, 'Settling.'],
    [undefined, 'Settling.'],
  ])('with %s ms to go says "%s"', (ms, text) => {
    expect(settlingText(ms)).toBe(text)
  })
})

describe('how long an overlay takes to answer', () => {
  it('is said in a sentence, and not where it is not known', () => {
    expect(answerText(13_200)).toBe('A change of links takes about 15 s to show here as a settled reading.')
    expect(answerText(null)).toBeNull()
    expect(answerText(undefined)).toBeNull()
  })
})
