import type { Letter } from './letter'
import type { MessageKind } from './message'

/** Characters of one message in the GSM 7-bit alphabet, and in UCS-2 where that cannot say it (3GPP TS 23.038). */
export const GSM_MOST = 160
export const UCS2_MOST = 70

/** The basic character set of 3GPP TS 23.038, 6.2.1, without its control characters. From memory of the standard. */
const GSM_BASIC = new Set(
  '@£$¥èéùìòÇØøÅåΔ_ΦΓΛΩΠΨΣΘΞÆæßÉ !"#¤%&\'()*+,-./0123456789:;<=>?¡ABCDEFGHIJKLMNOPQRSTUVWXYZÄÖÑÜ§¿abcdefghijklmnopqrstuvwxyzäöñüà',
)
/** Ways around what the alphabet lacks. */
const PLAIN: Record<string, string> = {
  '–': '-',
  '—': '-',
  '−': '-',
  '‘': "'",
  '’': "'",
  '“': '"',
  '”': '"',
  '…': '...',
  '·': '-',
  '×': 'x',
  λ: 'lambda',
  '₂': '2',
  '[': '(',
  ']': ')',
  '{': '(',
  '}': ')',
  '|': '/',
  '~': '-',
  '^': "'",
  '\\': '/',
  '€': 'EUR',
}
const NEWS: Record<MessageKind, string> = {
  raised: '',
  next: 'nobody has it yet. ',
  graver: 'graver. ',
  taken: 'taken. ',
  cleared: 'cleared. ',
  resolved: 'resolved. ',
  reopened: 'open again. ',
  test: '',
}
/** The least that is left of the sentence to make room for the address. */
const SENTENCE_LEAST = 40

/** One short message: what it is about first, then as much of the sentence as there is room for, and the address. */
export function smsText(letter: Letter, origin: string | null): string {
  const { incident, overlay, team, holder } = letter.body
  const repeat = letter.mayBeRepeat ? '(may be a repeat) ' : ''
  if (!incident)
    return fit(
      `Thinspan test for ${team.name}: `,
      `${repeat}nothing has happened, nothing is to be done.`,
      '',
    )
  const news = letter.kind === 'taken' && holder ? `${holder} has it. ` : NEWS[letter.kind]
  const head = `Thinspan ${incident.number} ${incident.severity.toUpperCase()} ${overlay?.name ?? team.name}: ${repeat}${news}`
  return fit(head, incident.sentence, origin ? ` ${origin}/incidents/${incident.number}` : '')
}

function fit(head: string, sentence: string, link: string): string {
  const gsm = [head, sentence, link].map(toGsm)
  const isGsm = gsm.every((part) => [...part].every((char) => GSM_BASIC.has(char)))
  const [start = '', middle = '', end = ''] = isGsm ? gsm : [head, sentence, link]
  const most = isGsm ? GSM_MOST : UCS2_MOST
  const room = most - start.length - end.length
  if (middle.length > room && room < SENTENCE_LEAST) return cut(start + middle, most)
  return start + cut(middle, room) + end
}

/** Letters that have no place in the alphabet stay: a name in another script is better read than guessed. */
function toGsm(text: string): string {
  return [...text.normalize('NFC')]
    .map((char) => {
      if (GSM_BASIC.has(char)) return char
      const plain = PLAIN[char] ?? char.normalize('NFKD').replace(/\p{M}/gu, '')
      if ([...plain].every((one) => GSM_BASIC.has(one))) return plain
      return /\p{L}/u.test(char) ? char : '?'
    })
    .join('')
}

function cut(text: string, most: number): string {
  return text.length <= most ? text : `${text.slice(0, Math.max(0, most - 3)).trimEnd()}...`
}
