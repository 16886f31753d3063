'use client'

import { useMemo } from 'react'
import { useJoiningCodes } from '@/components/live/hooks'
import {
  type Column,
  ConfirmDialog,
  DataTable,
  EmptyState,
  FailedState,
  Mark,
  Time,
  Waiting,
} from '@/components/ui'
import type { JoiningCode } from '@/lib/data/dto'
import { formatCount } from '@/lib/face/format'
import { IDLE } from '@/lib/http/form-state'
import type { RevokeCode } from './types'

export function CodesTable({ slug, revoke }: { slug: string; revoke: RevokeCode }) {
  const codes = useJoiningCodes(slug)
  const retry = codes.retry
  const columns = useMemo(() => columnsFor(slug, revoke, retry), [slug, revoke])
  if (!codes.data) {
    if (!codes.error) return <Waiting label="Loading the joining codes" className="h-40" />
    return (
      <FailedState quiet title="The joining codes could not be loaded." onRetry={codes.retry}>
        {codes.error.message}
      </FailedState>
    )
  }
  return (
    <DataTable
      caption="Joining codes"
      columns={columns}
      rows={codes.data}
      rowKey={(c) => c.id}
      stacks
      csvName={`${slug}-joining-codes`}
      initialSort={{ id: 'created', descending: true }}
      empty={
        <EmptyState title="No joining code has been made yet.">
          Create one above to add the first agent.
        </EmptyState>
      }
    />
  )
}

function columnsFor(slug: string, revoke: RevokeCode, done: () => void): Column<JoiningCode>[] {
  return [
    {
      id: 'hint',
      header: 'begins with',
      value: (c) => c.hint,
      cell: (c) => <span className="font-figures">{c.hint}…</span>,
    },
    {
      id: 'state',
      header: 'state',
      value: (c) => c.state,
      cell: (c) => (
        <Mark shape={c.state === 'open' ? 'full' : c.state === 'revoked' ? 'crossed' : 'short'}>
          {c.state}
        </Mark>
      ),
    },
    {
      id: 'used',
      header: 'used',
      figures: true,
      value: (c) => c.used,
      cell: (c) => `${c.used} of ${c.uses}`,
    },
    {
      id: 'expires',
      header: 'closes',
      value: (c) => c.expiresAt,
      cell: (c) => <span className="whitespace-nowrap">{<Time at={c.expiresAt} />}</span>,
    },
    {
      id: 'created',
      header: 'made',
      value: (c) => c.createdAt,
      cell: (c) => <span className="whitespace-nowrap">{<Time at={c.createdAt} />}</span>,
    },
    { id: 'by', header: 'by', value: (c) => c.createdBy },
    {
      id: 'revoke',
      header: 'revoke',
      data: false,
      value: () => null,
      cell: (c) => (c.state === 'open' ? <Revoke slug={slug} code={c} revoke={revoke} done={done} /> : null),
    },
  ]
}

function Revoke(props: { slug: string; code: JoiningCode; revoke: RevokeCode; done: () => void }) {
  const { slug, code, revoke, done } = props
  const left = code.uses - code.used
  return (
    <ConfirmDialog
      label="Revoke"
      kind="quiet"
      title={`Revoke the code that begins with ${code.hint}?`}
      confirmLabel="Revoke the code"
      onConfirm={async () => {
        const form = new FormData()
        form.set('slug', slug)
        form.set('id', code.id)
        const result = await revoke(IDLE, form)
        if (result.status === 'failed') return result.problem.detail
        done()
        return null
      }}
    >
      <p>
        {formatCount(left, 'further agent')} could still join with it; none can afterwards. This cannot be
        undone: a new code is needed instead.
      </p>
      {code.used > 0 ? (
        <p className="text-soft">What joined with it stays: {formatCount(code.used, 'agent')}.</p>
      ) : null}
    </ConfirmDialog>
  )
}
