import { describe, expect, it } from 'vitest'
import type { Letter } from '@/lib/notify/letter'
import { smsText } from '@/lib/notify/sms-text'
import { htmlOf, REPEAT_SENTENCE, textOf, wordsOf } from '@/lib/notify/wording'

const at = '2026-12-02T04:00:00.000Z'
const letter = (
  change: Partial<Letter> = {},
  sentence = 'Three links still hold Eelholm to the rest.',
): Letter => ({
  id: 'a',
  kind: 'raised',
  firstSentence: null,
  mayBeRepeat: false,
  at: new Date(at),
  body: {
    at,
    incident: { id: 'i', number: 12, severity: 'urgent', sentence, raisedAt: at },
    overlay: { slug: 'tideline', name: 'Tideline' },
    team: { slug: 'harbourline', name: 'Harbourline' },
    because: 'It is your week.',
    details: [],
    holder: null,
  },
  ...change,
})
const ORIGIN = 'https://thinspan.harbourline.example'

describe('a mail', () => {
  it('keeps the subject its incident began with, on one line whatever names hold', () => {
    const first = letter({ firstSentence: 'Weak:\r\nBcc: everyone@harbourline.example' }, 'Split.')
    expect(wordsOf(first, null).subject).toBe(
      '[Thinspan] Incident 12, Tideline: Weak: Bcc: everyone@harbourline.example',
    )
  })

  it('says first that it may be a repeat', () => {
    const words = wordsOf(letter({ mayBeRepeat: true }), ORIGIN)
    expect(textOf(words).startsWith(`${REPEAT_SENTENCE}\n\n`)).toBe(true)
    expect(htmlOf(words)).toContain(`<strong>${REPEAT_SENTENCE}</strong>`)
  })

  it('lets nothing of a name or sentence become HTML', () => {
    const html = htmlOf(wordsOf(letter({}, '<img src="http://x.example/a"> & more'), ORIGIN))
    expect(html).toContain('&lt;img src=&quot;http://x.example/a&quot;&gt; &amp; more')
    expect(html.match(/<(?!\/?(?:html|body|p|strong|table|tr|td|br|a)\b|!doctype)/)).toBeNull()
  })

  it('has no link where nobody said where this server is', () => {
    expect(textOf(wordsOf(letter(), null))).not.toContain('http')
  })
})

describe('an SMS', () => {
  const long =
    'Two links are left between Tarnwick, Gullhythe and Pinnet Bay on one side and all of Eelholm on the other, and one of them is failing.'
  const table: [string, Letter, string | null, string][] = [
    [
      'says what it is about, the sentence and the address',
      letter({}, 'Two links left.'),
      ORIGIN,
      `Thinspan 12 URGENT Tideline: Two links left. ${ORIGIN}/incidents/12`,
    ],
    [
      'shortens the sentence for the address, to 160 characters',
      letter({}, long),
      ORIGIN,
      'Thinspan 12 URGENT Tideline: Two links are left between Tarnwick, Gullhythe and Pinnet Bay on one side and... https://thinspan.harbourline.example/incidents/12',
    ],
    [
      'does without an address that would leave no room for the sentence',
      letter({}, 'Two links left.'),
      `https://${'a'.repeat(60)}.${'b'.repeat(60)}.example`,
      'Thinspan 12 URGENT Tideline: Two links left.',
    ],
    [
      'says in its alphabet what that lacks: dashes, quotes, λ₂',
      letter({}, 'λ₂ of gul-04 – eel-09 is “low”…'),
      null,
      'Thinspan 12 URGENT Tideline: lambda2 of gul-04 - eel-09 is "low"...',
    ],
    [
      'keeps another script, in the 70 characters that such a message has',
      letter({}, 'Гавань почти отрезана от остальной сети, осталась одна линия связи'),
      null,
      'Thinspan 12 URGENT Tideline: Гавань почти отрезана от остальной сет...',
    ],
    [
      'says that it may be a repeat',
      letter({ mayBeRepeat: true }, 'Split.'),
      null,
      'Thinspan 12 URGENT Tideline: (may be a repeat) Split.',
    ],
    [
      'says who has it',
      letter({ kind: 'taken', body: { ...letter({}, 'Split.').body, holder: 'Ines' } }),
      null,
      'Thinspan 12 URGENT Tideline: Ines has it. Split.',
    ],
  ]
  it.each(table)('%s', (_name, given, origin, text) => {
    expect(smsText(given, origin)).toBe(text)
    expect(text.length).toBeLessThanOrEqual(/\p{Script=Cyrillic}/u.test(text) ? 70 : 160)
  })
})
