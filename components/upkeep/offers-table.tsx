'use client'

import { useMemo } from 'react'
import {
  type Column,
  ConfirmDialog,
  DataTable,
  EmptyState,
  Mark,
  type MarkShape,
  Time,
} from '@/components/ui'
import type { UpgradeOfferDto } from '@/lib/data/dto'
import { formatCount } from '@/lib/face/format'
import { type OfferStanding, offeredTo, offerProgress, offerStanding } from '@/lib/face/upkeep'
import { submit } from '@/lib/http/form-state'
import type { OfferAction } from './types'

export interface OffersTableProps {
  slug: string
  offers: readonly UpgradeOfferDto[]
  /** Null for those who may only look. */
  halt: OfferAction | null
  onDone: () => void
}

const SHAPES: Record<OfferStanding, MarkShape> = {
  'under way': 'hollow',
  'taken by all': 'full',
  halted: 'short',
}

export function OffersTable({ slug, offers, halt, onDone }: OffersTableProps) {
  const columns = useMemo(
    () => [...COLUMNS, ...(halt ? [haltColumn(slug, halt, onDone)] : [])],
    [slug, halt, onDone],
  )
  return (
    <DataTable
      caption="Offered upgrades"
      columns={columns}
      rows={offers}
      rowKey={(o) => o.id}
      stacks
      csvName={`${slug}-upgrades`}
      initialSort={{ id: 'offered', descending: true }}
      empty={
        <EmptyState title="No upgrade has been offered.">
          Agents started with <code className="font-figures">--upgrades</code> take what is offered to them;
          the others are brought up to date as they were installed.
        </EmptyState>
      }
    />
  )
}

const COLUMNS: Column<UpgradeOfferDto>[] = [
  { id: 'version', header: 'version', value: (o) => o.version },
  { id: 'to', header: 'to', value: (o) => offeredTo(o.label) },
  {
    id: 'state',
    header: 'state',
    value: (o) => offerStanding(o),
    cell: (o) => <Mark shape={SHAPES[offerStanding(o)]}>{offerStanding(o)}</Mark>,
  },
  { id: 'progress', header: 'taken', words: true, value: (o) => offerProgress(o) },
  {
    id: 'offered',
    header: 'offered',
    value: (o) => o.offeredAt,
    cell: (o) => (
      <>
        <Time at={o.offeredAt} show="moment" />
        {o.offeredBy ? <span className="text-soft"> by {o.offeredBy}</span> : null}
      </>
    ),
  },
]

function haltColumn(slug: string, halt: OfferAction, onDone: () => void): Column<UpgradeOfferDto> {
  return {
    id: 'halt',
    header: 'halt',
    data: false,
    value: () => null,
    cell: (offer) =>
      offer.haltedAt !== null ? null : (
        <ConfirmDialog
          label="Halt"
          kind="quiet"
          title={`Halt the offer of ${offer.version} to ${offeredTo(offer.label)}?`}
          confirmLabel="Halt the offer"
          keepLabel="Go on"
          onConfirm={async () => {
            const state = await submit(halt, { slug, id: offer.id })
            if (state.status === 'failed') return state.problem.detail
            onDone()
            return null
          }}
        >
          <p>
            {formatCount(offer.counts.waiting, 'agent')} without word yet will not take it. Those that run it
            already, {offer.counts.runs} of {offer.counts.offered}, stay with it: to bring them back, offer
            the earlier version.
          </p>
        </ConfirmDialog>
      ),
  }
}
