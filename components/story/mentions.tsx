'use client'

import Link from 'next/link'
import { type Column, DataTable, EmptyState, Sheet, Time } from '@/components/ui'
import type { Mention } from '@/lib/data/weak-dto'
import { INCIDENT_STATE_WORDS } from '@/lib/face/incidents'
import { incidentUrls } from '@/lib/face/urls'

/** Incidents whose timeline names what the page is about. */
export function Mentions({ mentions, what }: { mentions: readonly Mention[]; what: string }) {
  return (
    <Sheet heading="Incidents" aside={mentions.length > 0 ? `that name ${what}, newest first` : null}>
      <DataTable
        caption={`Incidents that name ${what}`}
        columns={COLUMNS}
        rows={mentions}
        rowKey={({ id }) => id}
        stacks
        empty={<EmptyState title={`No incident names ${what}.`}>Those that do are listed here.</EmptyState>}
      />
    </Sheet>
  )
}

const COLUMNS: Column<Mention>[] = [
  {
    id: 'number',
    header: 'incident',
    value: ({ number }) => number,
    cell: ({ number }) => (
      <Link href={incidentUrls(number).page} className="rule-link font-medium whitespace-nowrap">
        No. {number}
      </Link>
    ),
  },
  {
    id: 'raised',
    header: 'raised',
    value: ({ raisedAt }) => raisedAt,
    cell: ({ raisedAt }) => (
      <span className="whitespace-nowrap">
        <Time at={raisedAt} show="moment" />
      </span>
    ),
  },
  { id: 'state', header: 'state', value: ({ state }) => INCIDENT_STATE_WORDS[state] },
  {
    id: 'line',
    header: 'what it says',
    words: true,
    value: ({ lines }) => lines[0]?.text ?? null,
    cell: ({ lines }) => (
      <ul>
        {lines.map(({ at, text }) => (
          <li key={`${at}${text}`}>{text}</li>
        ))}
      </ul>
    ),
  },
]
