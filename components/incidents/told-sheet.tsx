'use client'

import { type Column, DataTable, EmptyState, Mark, type MarkShape, Sheet, Time } from '@/components/ui'
import type { IncidentWhole } from '@/lib/data/warn-dto'

type Told = IncidentWhole['told'][number]

const BY: Record<Told['by'], string> = { email: 'e-mail', sms: 'SMS', webhook: 'webhook' }
const SHAPES: Record<Told['state'], MarkShape> = {
  waiting: 'hollow',
  sending: 'hollow',
  sent: 'full',
  failed: 'crossed',
  dropped: 'short',
}

const COLUMNS: Column<Told>[] = [
  { id: 'at', header: 'when', value: (t) => t.at, cell: (t) => <Time at={t.at} show="moment" /> },
  { id: 'to', header: 'who', value: (t) => t.to },
  { id: 'by', header: 'by', value: (t) => BY[t.by] },
  { id: 'what', header: 'of what', value: (t) => t.what },
  {
    id: 'state',
    header: 'state',
    value: (t) => t.state,
    cell: (t) => <Mark shape={SHAPES[t.state]}>{t.state}</Mark>,
  },
]

export function ToldSheet({ incident }: { incident: IncidentWhole }) {
  return (
    <Sheet heading="Who was told">
      <DataTable
        caption="Who was told"
        columns={COLUMNS}
        rows={incident.told}
        rowKey={(t) => `${t.at} ${t.to} ${t.by} ${t.what}`}
        stacks
        csvName={`incident-${incident.number}-told`}
        initialSort={{ id: 'at' }}
        empty={
          <EmptyState title="Nobody has been told.">
            A rule tells whoever stands in its call order, by the channels each has set up.
          </EmptyState>
        }
      />
    </Sheet>
  )
}
