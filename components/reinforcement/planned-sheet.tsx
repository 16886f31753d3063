'use client'

import { useMemo } from 'react'
import { ActButton, outcomeOf } from '@/components/telling/act-button'
import { type Column, ConfirmDialog, DataTable, EmptyState, Sheet, Time } from '@/components/ui'
import type { PlannedLink } from '@/lib/data/reinforcement-dto'
import { formatLink, formatReading } from '@/lib/face/format'
import { broughtText, forecastText } from '@/lib/face/reinforcement'
import { type ReinforcementActions, thenRefresh } from './types'

export interface PlannedSheetProps {
  slug: string
  planned: readonly PlannedLink[]
  /** Null for those who may only look. */
  actions: ReinforcementActions | null
  onDone: () => void
}

/** Links that are meant to be made, and what they brought beside what was foretold. */
export function PlannedSheet({ slug, planned, actions, onDone }: PlannedSheetProps) {
  const columns = useMemo(
    () => [...COLUMNS, ...(actions ? [actColumn(slug, actions, onDone)] : [])],
    [slug, actions, onDone],
  )
  return (
    <Sheet heading="Planned, and what they brought" aside="forecasts are of each link alone">
      <DataTable
        caption="Planned links, newest first"
        columns={columns}
        rows={planned}
        rowKey={({ id }) => id}
        stacks
        csvName={`${slug}-planned-links`}
        empty={
          <EmptyState title="No link is planned.">
            Plan a proposed link, make it, and the reading before and after stands here beside the forecast.
          </EmptyState>
        }
      />
    </Sheet>
  )
}

const figure = (value: PlannedLink['before']) => (value ? formatReading(value.lambda2) : '–')
const SEEN = {
  named: 'its ends name it',
  degrees: 'both ends have more links than when it was planned',
  operator: 'somebody said so',
}

const COLUMNS: Column<PlannedLink>[] = [
  {
    id: 'link',
    header: 'link',
    value: ({ a, b }) => formatLink(a, b),
    cell: ({ a, b }) => <span className="whitespace-nowrap">{formatLink(a, b)}</span>,
  },
  {
    id: 'planned',
    header: 'planned',
    value: ({ plannedAt }) => plannedAt,
    cell: ({ plannedAt, plannedBy }) => (
      <>
        <Time at={plannedAt} show="moment" />
        {plannedBy ? <span className="block text-sm text-soft">{plannedBy}</span> : null}
      </>
    ),
  },
  {
    id: 'forecast',
    header: 'forecast',
    figures: true,
    value: ({ forecast }) => forecast,
    cell: ({ lambda2Then, forecast, method }) =>
      `${formatReading(lambda2Then)} → ${forecastText(method, forecast)}`,
  },
  {
    id: 'before',
    header: 'before',
    figures: true,
    value: ({ before }) => before?.lambda2 ?? null,
    cell: ({ before }) => figure(before),
  },
  {
    id: 'after',
    header: 'after',
    figures: true,
    value: ({ after }) => after?.lambda2 ?? null,
    cell: ({ after }) => figure(after),
  },
  {
    id: 'brought',
    header: 'brought',
    words: true,
    value: broughtText,
    cell: (link) => (
      <>
        {broughtText(link)}
        {link.joinedAt && link.seenBy ? (
          <span className="block text-sm text-soft">
            there since <Time at={link.joinedAt} show="moment" />: {SEEN[link.seenBy]}
          </span>
        ) : null}
      </>
    ),
  },
]

function actColumn(slug: string, actions: ReinforcementActions, onDone: () => void): Column<PlannedLink> {
  return {
    id: 'act',
    header: 'change',
    data: false,
    value: () => null,
    cell: ({ id, a, b, state }) =>
      state !== 'planned' ? null : (
        <span className="flex flex-wrap gap-1">
          <ActButton action={thenRefresh(actions.markJoined, onDone)} fields={{ slug, id }} done="noted">
            It is there
          </ActButton>
          <ConfirmDialog
            label="Withdraw"
            kind="quiet"
            title={`Withdraw ${formatLink(a, b)}?`}
            confirmLabel="Withdraw it"
            onConfirm={async () => {
              const failed = await outcomeOf(actions.withdraw, { slug, id })
              if (failed === null) onDone()
              return failed
            }}
          >
            <p>It stays listed as withdrawn, and nobody follows what becomes of it any more.</p>
          </ConfirmDialog>
        </span>
      ),
  }
}
