import { describe, expect, it } from 'vitest'
import type { IncidentWhole } from '@/lib/data/warn-dto'
import { layoutStretch } from '@/lib/face/stretch'
import { type IncidentReportInput, incidentReport } from '@/lib/report/incident-report'
import { printReport } from '@/lib/report/print'
import { printable } from '@/lib/report/printable'
import { isZone, stamp } from '@/lib/report/times'
import { pdfText } from '@/tests/support/pdf-text'

const ferrier = { id: 'f', name: 'S. Ferrier' }
const entry = (id: number, at: string, kind: IncidentWhole['entries'][number]['kind'], text: string) => ({
  id: String(id),
  at: `2026-11-20T${at}.000Z`,
  kind,
  text,
  by: kind === 'note' || kind === 'taken' ? ferrier : null,
})
const incident: IncidentWhole = {
  id: 'i',
  number: 12,
  overlay: { slug: 'tides', name: 'Tide tables' },
  team: { slug: 'harbourline', name: 'Harbourline' },
  severity: 'urgent',
  state: 'cleared',
  sentence: 'Few links left: 2 links hold the sides together.',
  raisedAt: '2026-11-20T01:04:07.000Z',
  clearedAt: '2026-11-20T01:46:00.000Z',
  resolvedAt: null,
  holder: ferrier,
  heldSince: '2026-11-20T01:09:00.000Z',
  mutedUntil: null,
  mutedBecause: null,
  inMaintenance: false,
  role: 'viewer',
  entries: [
    entry(1, '01:04:07', 'raised', 'Few links left: 2 links hold the sides together.'),
    entry(2, '01:05:30', 'link-lost', 'tar-01 – gul-04 lost'),
    entry(3, '01:09:00', 'taken', 'S. Ferrier has it'),
    entry(4, '01:20:00', 'note', 'The switch at Gullhythe restarts by itself.'),
    entry(5, '01:46:00', 'cleared-all', 'Nothing is raised any more'),
  ],
  files: [
    {
      id: 'x',
      name: 'switch.log',
      mediaType: 'text/plain',
      size: 2_400,
      by: ferrier,
      at: '2026-11-20T01:22:00.000Z',
    },
  ],
  momentAt: '2026-11-20T01:04:00.000Z',
  raised: [],
  told: [],
  people: [],
}
const node = (name: string, side: 'a' | 'b', value: number, office: string) => ({
  ...{ name, side, value, labels: { office }, degree: 3 },
  state: 'heard' as const,
})
const drawing = layoutStretch({
  nodes: [
    node('tar-01', 'a', -1, 'Tarnwick'),
    node('tar-02', 'a', -0.9, 'Tarnwick'),
    node('gul-04', 'b', 0.8, 'Gullhythe'),
    node('gul-05', 'b', 1.1, 'Gullhythe'),
  ],
  links: [{ a: 'tar-01', b: 'gul-04', weight: 1, share: 0.7, crossing: true, state: 'live' }],
  laneKey: 'office',
  sided: true,
  crossingLinks: 1,
  silent: false,
  width: 880,
})
const input: IncidentReportInput = {
  incident,
  told: [
    {
      ...{
        at: '2026-11-20T01:04:08.000Z',
        to: 'S. Ferrier',
        by: 'sms',
        what: 'that it was raised',
        state: 'sent',
      },
      attempts: [
        { at: '2026-11-20T01:04:09.000Z', outcome: 'again', answer: '503 busy' },
        { at: '2026-11-20T01:04:19.000Z', outcome: 'sent', answer: '201 queued' },
      ],
    },
  ],
  drawing,
  zone: 'Europe/Berlin',
  madeAt: new Date('2026-11-21T09:00:00.000Z'),
}
const textOf = async (over: Partial<IncidentReportInput> = {}) =>
  pdfText(await printReport(incidentReport({ ...input, ...over }), { compress: false }))

describe('the report of an incident', () => {
  it('has the timeline in order, in UTC and in the zone asked for, as text', async () => {
    const text = await textOf()
    const places = incident.entries.map(({ at, text: what }) => [
      text.indexOf(`\n${stamp(Date.parse(at), 'UTC')}\n${stamp(Date.parse(at), 'Europe/Berlin')}\n`),
      text.indexOf(what),
    ])
    for (const [time, what] of places) {
      expect(time).toBeGreaterThan(0)
      expect(what).toBeGreaterThan(0)
    }
    const times = places.map(([time]) => time)
    expect(times).toEqual([...times].sort((p, q) => p! - q!))
    expect(text).toContain('2026-11-20 01:04:07\n2026-11-20 02:04:07\nFew links left')
    expect(text).toContain('S. Ferrier noted: The switch at Gullhythe restarts by itself.')
  })

  it('says who was told with each attempt, which files there are, who has it, and its caution', async () => {
    const text = (await textOf()).replace(/\s+/g, ' ')
    for (const part of [
      'Incident 12 · Tide tables · Harbourline',
      'urgent',
      'S. Ferrier, since 2026-11-20 01:09:00 UTC (2026-11-20 02:09:00 Europe/Berlin)',
      'after 41 min',
      'sent, 2 attempts: 01:04:09 again: 503 busy; 01:04:19 sent: 201 queued',
      'switch.log 3 kB S. Ferrier',
      'Tarnwick',
      'tar-01',
      '70',
      'never the only safeguard',
      'page 1 of 1',
    ])
      expect(text).toContain(part)
  })

  it('draws a line for the link between the sides and a shape for each node', async () => {
    const source = Buffer.from(await printReport(incidentReport(input), { compress: false })).toString(
      'latin1',
    )
    const bare = Buffer.from(
      await printReport(incidentReport({ ...input, drawing: null }), { compress: false }),
    ).toString('latin1')
    const count = (operator: RegExp) => [source, bare].map((pdf) => pdf.match(operator)?.length ?? 0)
    // Of cubic curves a round node is four; the link is a quadratic one, which pdfkit puts as "v".
    expect([count(/ c$/gm), count(/ v$/gm)]).toEqual([
      [2 * 4, 0],
      [1, 0],
    ])
    expect(pdfText(Buffer.from(bare, 'latin1'))).toContain('No drawing is kept of that moment.')
  })

  it('without a zone has times in UTC alone', async () => {
    const text = await textOf({ zone: null })
    expect(text).not.toContain('02:04:07')
    expect(text).toContain('2026-11-20 01:04:07\nFew links left')
  })

  it('goes on over as many pages as the timeline needs, with its heads repeated and nothing lost', async () => {
    const entries = Array.from({ length: 200 }, (_, index) =>
      entry(
        index,
        `0${1 + Math.floor(index / 60)}:${String(index % 60).padStart(2, '0')}:00`,
        'note',
        `Note ${index}.`,
      ),
    )
    const text = await textOf({ incident: { ...incident, entries } })
    for (const { text: what } of entries) expect(text).toContain(`noted: ${what}`)
    const pages = Number(/page 1 of (\d+)/.exec(text)?.[1])
    expect(pages).toBeGreaterThan(4)
    expect(text.match(/^UTC$/gm)?.length).toBeGreaterThanOrEqual(pages)
  })
})

describe('what the standard fonts lack', () => {
  it.each([
    ['λ₂ ≥ 0,5 − ½ → “Gullhythe”', 'lambda-2 at least  0,5 - ½ -> “Gullhythe”'],
    ['Ærø, Łódź, Győr', 'Ærø, ?ódz, Gyor'],
    ['港 \u0007', '? ?'],
  ])('%s is written %s', (text, shown) => expect(printable(text)).toBe(shown))
})

it('a zone is one that the system knows', () =>
  expect(['Europe/Berlin', 'UTC', 'Gullhythe/Quay', ''].map(isZone)).toEqual([true, true, false, false]))
