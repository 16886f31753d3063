'use client'

import Link from 'next/link'
import { useMemo } from 'react'
import { type Column, DataTable, EmptyState, SideMark } from '@/components/ui'
import type { OverlayNode } from '@/lib/data/dto'
import { formatValue } from '@/lib/face/format'

/** The drawing as a table: the same nodes, in the same order. */
export function StretchTable(props: {
  nodes: readonly OverlayNode[]
  sided: boolean
  /** Where a node's own page is, where there is room for it. */
  nodeHref?: (name: string) => string
}) {
  const { nodes, sided, nodeHref } = props
  const columns = useMemo(() => columnsFor(nodes, sided, nodeHref), [nodes, sided, nodeHref])
  return (
    <DataTable
      caption="Nodes by Fiedler value, from one end of the overlay to the other"
      columns={columns}
      rows={nodes}
      rowKey={(n) => n.name}
      csvName="stretch"
      initialSort={{ id: 'value' }}
      empty={<EmptyState title="No nodes to show yet." />}
    />
  )
}

function columnsFor(
  nodes: readonly OverlayNode[],
  sided: boolean,
  nodeHref?: (name: string) => string,
): Column<OverlayNode>[] {
  const keys = [...new Set(nodes.flatMap((n) => Object.keys(n.labels)))].sort()
  return [
    {
      id: 'name',
      header: 'node',
      value: (n) => n.name,
      cell: (n) =>
        nodeHref ? (
          <Link href={nodeHref(n.name)} className="rule-link">
            {n.name}
          </Link>
        ) : (
          n.name
        ),
    },
    {
      id: 'value',
      header: 'value',
      figures: true,
      value: (n) => n.value,
      cell: (n) => (n.value === null ? '–' : formatValue(n.value)),
    },
    ...(sided
      ? [
          {
            id: 'side',
            header: 'side',
            value: (n: OverlayNode) => n.side,
            cell: (n: OverlayNode) => (n.side ? <SideMark side={n.side} /> : '–'),
          },
        ]
      : []),
    ...keys.map((key) => ({
      id: `label:${key}`,
      header: key,
      value: (n: OverlayNode) => n.labels[key] ?? null,
    })),
    { id: 'state', header: 'state', value: (n) => n.state },
  ]
}
