'use client'

import { useMemo } from 'react'
import { ActButton } from '@/components/telling/act-button'
import { type Column, DataTable, EmptyState, Lambda, Note, SideMark } from '@/components/ui'
import type { Proposal, Reinforcement } from '@/lib/data/reinforcement-dto'
import { formatLink } from '@/lib/face/format'
import { labelText } from '@/lib/face/node-columns'
import { forecastText, gainText } from '@/lib/face/reinforcement'
import { type ReinforcementActions, thenRefresh } from './types'

export interface ProposalsSheetProps {
  slug: string
  found: Reinforcement
  /** Null for those who may only look. */
  plan: ReinforcementActions['plan'] | null
  onDone: () => void
}

export function ProposalsSheet({ slug, found, plan, onDone }: ProposalsSheetProps) {
  const { method, proposals } = found
  const numbered = useMemo(
    () => proposals.map((proposal, at) => ({ ...proposal, number: at + 1 })),
    [proposals],
  )
  const columns = useMemo(
    () => [...columnsFor(method), ...(plan ? [planColumn(slug, found, plan, onDone)] : [])],
    [slug, method, found, plan, onDone],
  )
  return (
    <div className="space-y-3">
      <DataTable
        caption="Proposed links, in the order in which they help most"
        columns={columns}
        rows={numbered}
        rowKey={({ a, b }) => `${a.name}\n${b.name}`}
        stacks
        csvName={`${slug}-reinforcement`}
        initialSort={{ id: 'number' }}
        empty={<EmptyState title={found.sentence}>{found.detail}</EmptyState>}
      />
      {proposals.length > 1 ? (
        <Note>
          Each figure is with the links above it as well. Chosen one after the other they are good, not surely
          the best set of that many.
        </Note>
      ) : null}
    </div>
  )
}

type Row = Proposal & { number: number }

function columnsFor(method: Reinforcement['method']): Column<Row>[] {
  const end = (which: 'a' | 'b'): Column<Row>[] => [
    {
      id: `${which}-labels`,
      header: which === 'a' ? 'one end' : 'other end',
      words: true,
      value: (row) => labelText(row[which].labels) || null,
      cell: (row) => (
        <>
          {row[which].name}
          {row[which].side ? (
            <span className="ml-2">
              <SideMark side={row[which].side} />
            </span>
          ) : null}
          <span className="block text-sm text-soft">
            {labelText(row[which].labels)}
            {row[which].degree === null ? '' : ` · ${row[which].degree} links`}
          </span>
        </>
      ),
    },
  ]
  return [
    { id: 'number', header: 'no.', figures: true, value: ({ number }) => number },
    {
      id: 'link',
      header: 'link',
      value: ({ a, b }) => formatLink(a.name, b.name),
      cell: ({ a, b }) => <span className="whitespace-nowrap">{formatLink(a.name, b.name)}</span>,
    },
    ...end('a'),
    ...end('b'),
    {
      id: 'gain',
      header: method === 'exact' ? 'adds' : 'adds at most',
      figures: true,
      value: ({ gain }) => gain,
      cell: (row) => gainText(method, row),
    },
    {
      id: 'lambda2',
      header: method === 'exact' ? 'lambda2 then' : 'lambda2 then at most',
      heading: (
        <span>
          <Lambda n={2} /> then
        </span>
      ),
      figures: true,
      value: ({ lambda2 }) => lambda2,
      cell: ({ lambda2 }) => forecastText(method, lambda2),
    },
  ]
}

function planColumn(
  slug: string,
  { planned }: Reinforcement,
  plan: ReinforcementActions['plan'],
  onDone: () => void,
): Column<Row> {
  const open = new Set(planned.filter(({ state }) => state === 'planned').map(({ a, b }) => `${a}\n${b}`))
  return {
    id: 'plan',
    header: 'plan',
    data: false,
    value: () => null,
    cell: ({ a, b }) =>
      open.has(`${a.name}\n${b.name}`) ? (
        <span className="text-sm text-soft">planned</span>
      ) : (
        <ActButton action={thenRefresh(plan, onDone)} fields={{ slug, a: a.name, b: b.name }} done="planned">
          Plan it
        </ActButton>
      ),
  }
}
