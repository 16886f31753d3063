'use client'

import { useMemo } from 'react'
import { type Column, ConfirmDialog, DataTable, EmptyState, Mark, Time } from '@/components/ui'
import type { Invitation } from '@/lib/data/partner-dto'
import { submit } from '@/lib/http/form-state'
import type { PartnerActions } from './types'

export interface InvitationsTableProps {
  slug: string
  invitations: readonly Invitation[]
  /** Null for those who may only look. */
  withdraw: PartnerActions['withdraw'] | null
  onDone: () => void
}

const SHAPES = { open: 'full', used: 'short', expired: 'hollow', withdrawn: 'crossed' } as const

export function InvitationsTable({ slug, invitations, withdraw, onDone }: InvitationsTableProps) {
  const columns = useMemo(() => columnsFor(slug, withdraw, onDone), [slug, withdraw, onDone])
  return (
    <DataTable
      caption="Invitations"
      columns={columns}
      rows={invitations}
      rowKey={(one) => one.id}
      stacks
      csvName={`${slug}-invitations`}
      initialSort={{ id: 'invited', descending: true }}
      empty={
        <EmptyState title="No team has been invited yet.">
          An owner creates an invitation above, and hands its code to an owner of the other team.
        </EmptyState>
      }
    />
  )
}

function columnsFor(
  slug: string,
  withdraw: InvitationsTableProps['withdraw'],
  onDone: () => void,
): Column<Invitation>[] {
  const columns: Column<Invitation>[] = [
    {
      id: 'hint',
      header: 'begins with',
      value: (one) => one.hint,
      cell: (one) => <span className="font-figures">{one.hint}…</span>,
    },
    {
      id: 'state',
      header: 'state',
      value: (one) => one.state,
      cell: (one) => <Mark shape={SHAPES[one.state]}>{one.state}</Mark>,
    },
    { id: 'team', header: 'team', value: (one) => one.team?.name ?? null },
    {
      id: 'expires',
      header: 'closes',
      value: (one) => one.expiresAt,
      cell: (one) => (
        <span className="whitespace-nowrap">
          <Time at={one.expiresAt} />
        </span>
      ),
    },
    {
      id: 'invited',
      header: 'made',
      value: (one) => one.invitedAt,
      cell: (one) => (
        <span className="whitespace-nowrap">
          <Time at={one.invitedAt} />
        </span>
      ),
    },
    { id: 'by', header: 'by', value: (one) => one.invitedBy },
  ]
  if (!withdraw) return columns
  return [
    ...columns,
    {
      id: 'withdraw',
      header: 'withdraw',
      data: false,
      value: () => null,
      cell: (one) =>
        one.state === 'open' ? (
          <ConfirmDialog
            label="Withdraw"
            kind="quiet"
            title={`Withdraw the invitation that begins with ${one.hint}?`}
            confirmLabel="Withdraw it"
            onConfirm={async () => {
              const result = await submit(withdraw, { slug, id: one.id })
              if (result.status === 'failed') return result.problem.detail
              onDone()
              return null
            }}
          >
            <p>No team can accept it any more. This cannot be undone: a new one is needed instead.</p>
          </ConfirmDialog>
        ) : null,
    },
  ]
}
