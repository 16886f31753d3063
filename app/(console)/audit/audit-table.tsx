'use client'

import { type Column, DataTable, EmptyState, Time } from '@/components/ui'
import type { AuditItem } from '@/lib/data/dto'
import { ACTION_WORDS, dataWords, OUTCOME_WORDS } from './words'

const COLUMNS: Column<AuditItem>[] = [
  {
    id: 'at',
    header: 'When',
    value: (entry) => entry.at,
    cell: (entry) => <Time at={entry.at} show="both" />,
  },
  { id: 'actor', header: 'Who', value: (entry) => entry.actor },
  { id: 'action', header: 'Action', value: (entry) => ACTION_WORDS[entry.action] ?? entry.action },
  { id: 'subject', header: 'To what', value: (entry) => entry.subject },
  {
    id: 'outcome',
    header: 'Outcome',
    value: (entry) => OUTCOME_WORDS[entry.outcome],
    cell: (entry) => (
      <span className={entry.outcome === 'ok' ? undefined : 'font-semibold'}>
        {OUTCOME_WORDS[entry.outcome]}
      </span>
    ),
  },
  { id: 'data', header: 'Details', value: (entry) => dataWords(entry.data) },
]

export function AuditTable({
  items,
  filtered,
  teamSlug,
}: {
  items: AuditItem[]
  filtered: boolean
  teamSlug: string
}) {
  return (
    <DataTable
      caption="Audit entries"
      columns={COLUMNS}
      rows={items}
      rowKey={(entry) => entry.id}
      csvName={`audit-${teamSlug}`}
      initialSort={{ id: 'at', descending: true }}
      empty={
        filtered ? (
          <EmptyState title="No entry matches the filter.">Change or clear the filter above.</EmptyState>
        ) : (
          <EmptyState title="Nothing has been entered yet.">
            Entries appear when someone signs in or changes something.
          </EmptyState>
        )
      }
    />
  )
}
