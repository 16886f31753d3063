'use client'

import Link from 'next/link'
import { type ReactNode, useMemo } from 'react'
import { type Column, DataTable, type TableFilter, Time } from '@/components/ui'
import { INCIDENT_STATES, type Incident } from '@/lib/data/warn-dto'
import { INCIDENT_STATE_WORDS } from '@/lib/face/incidents'
import { incidentUrls } from '@/lib/face/urls'
import { SEVERITIES } from '@/lib/warn/rule'
import { IncidentStateMark, SeverityMark } from './marks'

const COLUMNS: Column<Incident>[] = [
  {
    id: 'number',
    header: 'number',
    value: (i) => i.number,
    cell: (i) => (
      <Link
        href={incidentUrls(i.number).page}
        className="inline-block py-1 font-figures underline underline-offset-4"
      >
        {i.number}
      </Link>
    ),
  },
  {
    id: 'sentence',
    header: 'what',
    words: true,
    value: (i) => i.sentence,
    cell: (i) => (
      <Link href={incidentUrls(i.number).page} className="no-underline hover:underline">
        {i.sentence}
      </Link>
    ),
  },
  { id: 'overlay', header: 'overlay', value: (i) => i.overlay.name },
  {
    id: 'severity',
    header: 'severity',
    value: (i) => i.severity,
    cell: (i) => <SeverityMark severity={i.severity} />,
  },
  {
    id: 'state',
    header: 'state',
    value: (i) => INCIDENT_STATE_WORDS[i.state],
    cell: (i) => <IncidentStateMark state={i.state} />,
  },
  { id: 'holder', header: 'who has it', value: (i) => i.holder?.name ?? null },
  {
    id: 'raised',
    header: 'raised',
    value: (i) => i.raisedAt,
    cell: (i) => <Time at={i.raisedAt} show="both" />,
  },
  { id: 'cleared', header: 'cleared', shown: false, value: (i) => i.clearedAt },
  { id: 'resolved', header: 'resolved', shown: false, value: (i) => i.resolvedAt },
]

const TEAM: Column<Incident> = { id: 'team', header: 'team', value: (i) => i.team.name }

export function IncidentsTable(props: {
  incidents: readonly Incident[]
  caption: string
  csvName: string
  showTeam: boolean
  empty: ReactNode
}) {
  const { incidents, caption, csvName, showTeam, empty } = props
  const columns = useMemo(() => (showTeam ? [...COLUMNS, TEAM] : COLUMNS), [showTeam])
  const filters = useMemo(() => filtersFor(incidents), [incidents])
  return (
    <DataTable
      caption={caption}
      columns={columns}
      rows={incidents}
      rowKey={(i) => i.id}
      stacks
      search="Search"
      filters={filters}
      csvName={csvName}
      initialSort={{ id: 'number', descending: true }}
      empty={empty}
    />
  )
}

/** Only what tells rows apart. */
function filtersFor(incidents: readonly Incident[]): TableFilter<Incident>[] {
  const overlays = new Map(incidents.map(({ overlay }) => [overlay.slug, overlay.name]))
  const states = INCIDENT_STATES.filter((state) => incidents.some((i) => i.state === state))
  const severities = SEVERITIES.filter((severity) => incidents.some((i) => i.severity === severity))
  const all: TableFilter<Incident>[] = [
    {
      id: 'overlay',
      label: 'Overlay',
      options: [...overlays].map(([value, label]) => ({ value, label })),
      match: (i, value) => i.overlay.slug === value,
    },
    {
      id: 'severity',
      label: 'Severity',
      options: severities.map((value) => ({ value, label: value })),
      match: (i, value) => i.severity === value,
    },
    {
      id: 'state',
      label: 'State',
      options: states.map((value) => ({ value, label: INCIDENT_STATE_WORDS[value] })),
      match: (i, value) => i.state === value,
    },
  ]
  return all.filter(({ options }) => options.length > 1)
}
