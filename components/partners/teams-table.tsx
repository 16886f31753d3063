'use client'

import { useMemo } from 'react'
import { type Column, ConfirmDialog, DataTable, Time } from '@/components/ui'
import type { OverlayTeam, Partners } from '@/lib/data/partner-dto'
import { formatCount } from '@/lib/face/format'
import { submit } from '@/lib/http/form-state'
import type { PartnerActions } from './types'

export interface TeamsTableProps {
  slug: string
  partners: Partners
  end: PartnerActions['end']
  onDone: () => void
}

export function TeamsTable({ slug, partners, end, onDone }: TeamsTableProps) {
  const columns = useMemo(() => columnsFor(slug, partners, end, onDone), [slug, partners, end, onDone])
  return (
    <>
      <DataTable
        caption="Teams that share this overlay"
        columns={columns}
        rows={partners.teams}
        rowKey={({ team }) => team.slug}
        stacks
        csvName={`${slug}-teams`}
        empty={null}
      />
      {partners.teams.length === 1 ? (
        <p className="mt-3 max-w-2xl text-soft">
          Only your team takes part.{' '}
          {partners.may.invite
            ? 'Invite another with the button above.'
            : 'An owner of the team can invite another.'}
        </p>
      ) : null}
    </>
  )
}

function columnsFor(
  slug: string,
  { may, teams }: Partners,
  end: PartnerActions['end'],
  onDone: () => void,
): Column<OverlayTeam>[] {
  const columns: Column<OverlayTeam>[] = [
    {
      id: 'team',
      header: 'team',
      value: ({ team }) => team.name,
      cell: ({ team, yours }) => (
        <span>
          <span className="font-medium">{team.name}</span>
          {yours ? <span className="text-soft"> (yours)</span> : null}
        </span>
      ),
    },
    {
      id: 'standing',
      header: 'takes part as',
      value: ({ standing }) => (standing === 'owner' ? 'owner of the overlay' : 'partner'),
    },
    { id: 'contact', header: 'contact', words: true, value: ({ contact }) => contact },
    {
      id: 'heard',
      header: 'agents heard',
      figures: true,
      value: ({ heard }) => heard,
      cell: ({ heard, joined }) => `${heard} of ${joined}`,
    },
    {
      id: 'labels',
      header: 'labels shown to others',
      value: ({ sharedLabels }) => sharedLabels.join(', ') || null,
    },
    {
      id: 'since',
      header: 'since',
      value: ({ since }) => since,
      cell: ({ since }) => (
        <span className="whitespace-nowrap">
          <Time at={since} />
        </span>
      ),
    },
  ]
  // The owning team may end any partner's part, a partner its own.
  const owns = teams.some(({ standing, yours }) => standing === 'owner' && yours)
  const mayEnd = ({ standing, yours }: OverlayTeam) => may.end && standing === 'partner' && (owns || yours)
  if (!teams.some(mayEnd)) return columns
  return [
    ...columns,
    {
      id: 'end',
      header: 'end',
      data: false,
      value: () => null,
      cell: (one) => (mayEnd(one) ? <End slug={slug} one={one} end={end} onDone={onDone} /> : null),
    },
  ]
}

function End(props: { slug: string; one: OverlayTeam; end: PartnerActions['end']; onDone: () => void }) {
  const { slug, one, end, onDone } = props
  const { team, yours, joined } = one
  return (
    <ConfirmDialog
      label={yours ? 'Leave' : 'End'}
      kind="quiet"
      title={yours ? `Leave this overlay with ${team.name}?` : `End the sharing with ${team.name}?`}
      confirmLabel={yours ? 'Leave the overlay' : `End it with ${team.name}`}
      keepLabel="Keep it"
      onConfirm={async () => {
        const result = await submit(end, { slug, team: team.slug })
        if (result.status === 'failed') return result.problem.detail
        onDone()
        return null
      }}
    >
      <p>
        {formatCount(joined, 'agent')} of {team.name} {joined === 1 ? 'leaves' : 'leave'} at once:{' '}
        {joined === 1 ? 'its' : 'their'} keys are refused, the links to {joined === 1 ? 'it' : 'them'} shut,
        and {joined === 1 ? 'it counts' : 'they count'} no more. Its joining codes, upgrade offers, rules and
        maintenance windows for this overlay go, and its open incident is resolved.
      </p>
      <p className="text-soft">
        What was recorded of its incidents stays with {team.name}. To take part again it needs a new
        invitation, and its agents enrol anew.
      </p>
    </ConfirmDialog>
  )
}
