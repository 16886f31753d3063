import type { IncidentWhole } from '@/lib/data/warn-dto'
import { formatCount } from '@/lib/face/format'
import { formatBytes, holderWords } from '@/lib/face/incidents'
import type { StretchLayout } from '@/lib/face/stretch'
import { formatDuration } from '@/lib/face/time'
import type { Part, Report, TableColumn } from './parts'
import { stamp } from './times'

export interface IncidentReportInput {
  incident: IncidentWhole
  told: readonly ToldWithAttempts[]
  /** The drawing when it was raised; null where none is kept. */
  drawing: StretchLayout | null
  /** For times beside those in UTC; null for UTC alone. */
  zone: string | null
  madeAt: Date
}

export interface ToldWithAttempts {
  at: string
  to: string
  by: string
  what: string
  state: string
  attempts: readonly { at: string; outcome: string; answer: string | null }[]
}

export const CAUTION =
  'This report says what agents measured and what people wrote down. The reading describes the links that agents measure, not shared cables, power or the host’s own connections unless frames ride on them; below full coverage a false calm is possible. It is never the only safeguard where an outage can hurt people: local rules and qualified staff come first.'

/** Everything of an incident, in the order in which somebody asks for it afterwards. */
export function incidentReport(input: IncidentReportInput): Report {
  const { incident, told, drawing, madeAt } = input
  const zone = input.zone === 'UTC' ? null : input.zone
  const when = (at: string) => stamp(Date.parse(at), 'UTC')
  return {
    title: `Incident ${incident.number} of ${incident.overlay.name}`,
    madeAt,
    parts: [
      {
        is: 'title',
        above: `Incident ${incident.number} · ${incident.overlay.name} · ${incident.team.name}`,
        text: incident.sentence,
      },
      { is: 'block', rows: titleBlock(incident, zone) },
      { is: 'heading', text: 'What happened' },
      timeline(incident, zone),
      { is: 'heading', text: 'Who was told' },
      {
        is: 'table',
        columns: TOLD,
        rows: told.map((one) => [when(one.at), one.to, one.by, one.what, attemptsWords(one)]),
        empty: 'Nobody was told.',
      },
      { is: 'heading', text: 'Files' },
      {
        is: 'table',
        columns: FILES,
        rows: incident.files.map((file) => [
          when(file.at),
          file.name,
          formatBytes(file.size),
          file.by?.name ?? 'unknown',
        ]),
        empty: 'No file is attached.',
      },
      { is: 'heading', text: 'The overlay when it was raised' },
      ...drawingParts(drawing, incident.momentAt),
      { is: 'note', text: CAUTION },
    ],
  }
}

function titleBlock(incident: IncidentWhole, zone: string | null): [string, string][] {
  const at = (moment: string) =>
    `${stamp(Date.parse(moment), 'UTC')} UTC${zone ? ` (${stamp(Date.parse(moment), zone)} ${zone})` : ''}`
  const { raisedAt, clearedAt, resolvedAt, heldSince, holder, mutedUntil, mutedBecause } = incident
  return [
    ['Severity', incident.severity],
    ['Raised', at(raisedAt)],
    ['Cleared', clearedAt ? `${at(clearedAt)}, after ${lasted(raisedAt, clearedAt)}` : 'not yet'],
    ['Resolved', resolvedAt ? at(resolvedAt) : 'not yet'],
    ['Who has it', holder && heldSince ? `${holder.name}, since ${at(heldSince)}` : holderWords(incident)],
    ...(mutedUntil
      ? [
          ['Muted', `until ${at(mutedUntil)}${mutedBecause ? `: ${mutedBecause}` : ''}`] satisfies [
            string,
            string,
          ],
        ]
      : []),
    ...(incident.inMaintenance
      ? [['Maintenance', 'raised in a maintenance window: nobody was woken'] satisfies [string, string]]
      : []),
    ...(incident.raised.length > 0
      ? [['Raised in it', incident.raised.join('; ')] satisfies [string, string]]
      : []),
  ]
}

const lasted = (from: string, to: string) => formatDuration((Date.parse(to) - Date.parse(from)) / 1000)

function timeline(incident: IncidentWhole, zone: string | null): Part {
  const columns: TableColumn[] = zone
    ? [
        { header: 'UTC', share: 0.21, figures: true },
        { header: zone, share: 0.21, figures: true },
        { header: 'what', share: 0.58 },
      ]
    : [
        { header: 'UTC', share: 0.21, figures: true },
        { header: 'what', share: 0.79 },
      ]
  const rows = incident.entries.map(({ at, kind, text, by }) => [
    stamp(Date.parse(at), 'UTC'),
    ...(zone ? [stamp(Date.parse(at), zone)] : []),
    kind === 'note' && by ? `${by.name} noted: ${text}` : text,
  ])
  return { is: 'table', columns, rows, empty: 'Nothing was entered.' }
}

const TOLD: readonly TableColumn[] = [
  { header: 'UTC', share: 0.21, figures: true },
  { header: 'who', share: 0.17 },
  { header: 'by', share: 0.09 },
  { header: 'of what', share: 0.19 },
  { header: 'attempts and answers', share: 0.34 },
]
const FILES: readonly TableColumn[] = [
  { header: 'UTC', share: 0.21, figures: true },
  { header: 'file', share: 0.46 },
  { header: 'size', share: 0.12 },
  { header: 'by', share: 0.21 },
]

function attemptsWords({ state, attempts }: ToldWithAttempts): string {
  if (attempts.length === 0) return `${state}, not attempted yet`
  const each = attempts.map(
    ({ at, outcome, answer }) =>
      `${stamp(Date.parse(at), 'UTC').slice(11)} ${outcome}${answer ? `: ${answer}` : ''}`,
  )
  return `${state}, ${formatCount(attempts.length, 'attempt')}: ${each.join('; ')}`
}

function drawingParts(drawing: StretchLayout | null, momentAt: string | null): Part[] {
  if (!drawing || momentAt === null) return [{ is: 'text', text: 'No drawing is kept of that moment.' }]
  return [
    {
      is: 'drawing',
      layout: drawing,
      caption: `As kept at ${stamp(Date.parse(momentAt), 'UTC')} UTC. Left to right: Fiedler value; round nodes are on side a, square ones on side b, hollow ones unheard. A tauter, thicker link carries more of the reading.`,
    },
  ]
}
