'use client'

import { useMemo } from 'react'
import { Freshness } from '@/components/live/freshness'
import { useNodes, useOverlay } from '@/components/live/hooks'
import {
  type Column,
  DataTable,
  EmptyState,
  FailedState,
  LinkButton,
  SideMark,
  type TableFilter,
  Time,
  Waiting,
} from '@/components/ui'
import { roleReaches } from '@/lib/auth/permissions'
import { NODE_STATES, type OverlayNode } from '@/lib/data/dto'
import { formatValue } from '@/lib/face/format'
import { filterKeys, labelKeysOf, labelText, MAX_LABEL_COLUMNS } from '@/lib/face/node-columns'
import { StateMark } from './state-mark'

const NONE: OverlayNode[] = []

export function NodesTable({ slug }: { slug: string }) {
  const nodes = useNodes(slug)
  const overlay = useOverlay(slug)
  const rows = nodes.data ?? NONE
  const columns = useMemo(() => columnsFor(rows), [rows])
  const filters = useMemo(() => filtersFor(rows), [rows])

  if (!nodes.data) {
    if (!nodes.error) return <NodesWaiting />
    return (
      <FailedState title="The nodes could not be loaded." onRetry={nodes.retry}>
        {nodes.error.message}
      </FailedState>
    )
  }
  const may = overlay.data && roleReaches(overlay.data.role, 'operator')
  return (
    <>
      <Freshness of={nodes} />
      <DataTable
        caption="Nodes of this overlay"
        columns={columns}
        rows={rows}
        rowKey={(n) => n.name}
        csvName={`${slug}-nodes`}
        search="Find by name, label, version"
        filters={filters}
        initialSort={{ id: 'name' }}
        empty={
          <EmptyState
            title="No node has joined yet."
            actions={
              may ? (
                <LinkButton kind="main" href={`/overlays/${slug}/joining`}>
                  Create a joining code
                </LinkButton>
              ) : null
            }
          >
            {may
              ? 'A node appears here as soon as its agent has enrolled with a joining code.'
              : 'A node appears here as soon as its agent has enrolled. Joining codes are made by operators and owners.'}
          </EmptyState>
        }
      />
    </>
  )
}

export function NodesWaiting() {
  return <Waiting label="Loading the nodes" className="h-[32rem]" />
}

function columnsFor(nodes: readonly OverlayNode[]): Column<OverlayNode>[] {
  const keys = labelKeysOf(nodes)
  const labels: Column<OverlayNode>[] =
    keys.length <= MAX_LABEL_COLUMNS
      ? keys.map((key) => ({ id: `label:${key}`, header: key, value: (n) => n.labels[key] ?? null }))
      : [{ id: 'labels', header: 'labels', value: (n) => labelText(n.labels) }]
  return [
    {
      id: 'name',
      header: 'name',
      value: (n) => n.name,
      cell: (n) => <span className="font-medium whitespace-nowrap">{n.name}</span>,
    },
    ...labels,
    { id: 'state', header: 'state', value: (n) => n.state, cell: (n) => <StateMark state={n.state} /> },
    {
      id: 'side',
      header: 'side',
      value: (n) => n.side,
      cell: (n) => (n.side ? <SideMark side={n.side}>{n.side}</SideMark> : '–'),
    },
    {
      id: 'value',
      header: 'value',
      figures: true,
      value: (n) => n.value,
      cell: (n) => (n.value === null ? '–' : formatValue(n.value)),
    },
    { id: 'degree', header: 'links', figures: true, value: (n) => n.degree },
    {
      id: 'weight',
      header: 'delivered',
      figures: true,
      value: (n) => n.weightedDegree,
      cell: (n) => (n.weightedDegree === null ? '–' : n.weightedDegree.toFixed(2)),
    },
    {
      id: 'heard',
      header: 'last heard',
      value: (n) => n.heardAt,
      cell: (n) => <span className="whitespace-nowrap">{n.heardAt ? <Time at={n.heardAt} /> : 'never'}</span>,
    },
    { id: 'version', header: 'version', value: (n) => n.version },
  ]
}

function filtersFor(nodes: readonly OverlayNode[]): TableFilter<OverlayNode>[] {
  const option = (value: string) => ({ value, label: value })
  return [
    {
      id: 'state',
      label: 'state',
      options: NODE_STATES.map(option),
      match: (n, value) => n.state === value,
    },
    ...filterKeys(nodes).map(({ key, values }) => ({
      id: `label:${key}`,
      label: key,
      options: values.map(option),
      match: (n: OverlayNode, value: string) => n.labels[key] === value,
    })),
  ]
}
