import type { Letter } from './letter'
import type { MessageKind } from './message'

export const REPEAT_SENTENCE =
  'This may be a repeat: it was sent before, and whether it arrived is not known.'
export const CAUTION =
  'A warning can be late or missing. It is never the only safeguard where an outage can hurt people.'
const SIGN_IN = 'Open it to see what is known and to say that you have it; that needs your sign-in.'

/** What is said of an incident by each kind of message, before the incident's own sentence. */
const NEWS: Record<MessageKind, string> = {
  raised: 'New incident.',
  next: 'Nobody has it yet, and you are next.',
  graver: 'It has become graver.',
  taken: 'Somebody has it.',
  cleared: 'It has cleared: nothing in it is raised any more.',
  resolved: 'It is resolved.',
  reopened: 'It is open again.',
  test: 'This is a test: nothing has happened, and nothing is to be done.',
}

export interface Words {
  subject: string
  /** Said first, where it may have been said before. */
  repeat: string | null
  news: string
  /** What is so, in the incident's own sentence. */
  sentence: string | null
  paragraphs: string[]
  /** Figures of the incident, by name. */
  figures: [name: string, value: string][]
  link: { url: string; says: string } | null
  caution: string
}

/** @param origin scheme and host of this server; null where nobody said: then there is no link */
export function wordsOf(letter: Letter, origin: string | null): Words {
  const { kind, body, mayBeRepeat } = letter
  const { incident, overlay, team } = body
  return {
    subject: subjectOf(letter),
    repeat: mayBeRepeat ? REPEAT_SENTENCE : null,
    news: newsOf(letter),
    sentence: incident?.sentence ?? null,
    paragraphs: [...body.details, body.because].filter((text) => text !== ''),
    figures: [
      ...(incident
        ? ([
            ['incident', `${incident.number}, ${incident.severity}`],
            ['raised', formatUtc(incident.raisedAt)],
            ['who has it', body.holder ?? 'nobody'],
          ] as [string, string][])
        : []),
      ...(overlay ? ([['overlay', overlay.name]] as [string, string][]) : []),
      ['team', team.name],
      ['written', formatUtc(body.at)],
    ],
    link: incident && origin ? { url: `${origin}/incidents/${incident.number}`, says: SIGN_IN } : null,
    caution: kind === 'test' ? 'Whoever can read this can be told of incidents this way.' : CAUTION,
  }
}

function newsOf({ kind, body }: Letter): string {
  return kind === 'taken' && body.holder ? `${body.holder} has it.` : NEWS[kind]
}

function subjectOf({ body, firstSentence }: Letter): string {
  const { incident, overlay, team } = body
  if (!incident) return `[Thinspan] Test for ${team.name}`
  const where = overlay ? `, ${overlay.name}` : ''
  return plainLine(`[Thinspan] Incident ${incident.number}${where}: ${firstSentence ?? incident.sentence}`)
}

/** Names come from people: nothing of them may begin a new header. */
function plainLine(text: string): string {
  return text.replace(/[\p{Cc}\s]+/gu, ' ').slice(0, 200)
}

/** "2 Dec 2026 04:36 UTC": mails travel between zones. */
export function formatUtc(iso: string): string {
  const at = new Date(iso)
  const month = at.toLocaleString('en-GB', { month: 'short', timeZone: 'UTC' })
  const clock = at.toISOString().slice(11, 16)
  return `${at.getUTCDate()} ${month} ${at.getUTCFullYear()} ${clock} UTC`
}

export function textOf(words: Words): string {
  const { repeat, news, sentence, paragraphs, figures, link, caution } = words
  return [
    ...(repeat ? [repeat] : []),
    news,
    ...(sentence ? [sentence] : []),
    ...paragraphs,
    figures.map(([name, value]) => `${name}: ${value}`).join('\n'),
    ...(link ? [`${link.says}\n${link.url}`] : []),
    caution,
  ].join('\n\n')
}

/** The same content in the same order; no pictures, no addresses but the one link. */
export function htmlOf(words: Words): string {
  const { repeat, news, sentence, paragraphs, figures, link, caution } = words
  const p = (text: string) => `<p>${escapeHtml(text)}</p>`
  const rows = figures.map(
    ([name, value]) =>
      `<tr><td style="padding:0 1em 0 0;color:#555">${escapeHtml(name)}</td><td>${escapeHtml(value)}</td></tr>`,
  )
  return [
    '<!doctype html><html lang="en"><body style="font-family:sans-serif;line-height:1.45;max-width:40em">',
    ...(repeat ? [`<p><strong>${escapeHtml(repeat)}</strong></p>`] : []),
    p(news),
    ...(sentence ? [`<p style="font-size:1.15em"><strong>${escapeHtml(sentence)}</strong></p>`] : []),
    ...paragraphs.map(p),
    `<table style="border-collapse:collapse">${rows.join('')}</table>`,
    ...(link
      ? [`<p>${escapeHtml(link.says)}<br><a href="${escapeHtml(link.url)}">${escapeHtml(link.url)}</a></p>`]
      : []),
    `<p style="color:#555">${escapeHtml(caution)}</p>`,
    '</body></html>',
  ].join('\n')
}

function escapeHtml(text: string): string {
  return text
    .replaceAll('&', '&amp;')
    .replaceAll('<', '&lt;')
    .replaceAll('>', '&gt;')
    .replaceAll('"', '&quot;')
}
