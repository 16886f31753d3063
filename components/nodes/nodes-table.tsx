'use client'

import { useMemo, useState } from 'react'
import { Freshness } from '@/components/live/freshness'
import { useNodes, useOverlay } from '@/components/live/hooks'
import { DataTable, EmptyState, FailedState, LinkButton, Waiting } from '@/components/ui'
import { roleReaches } from '@/lib/auth/permissions'
import type { OverlayNode } from '@/lib/data/dto'
import { byConcern } from '@/lib/face/node-concerns'
import { nodeColumns, nodeFilters } from './columns'
import { NodeSheet } from './node-sheet'
import type { NodeActions } from './types'

const NONE: OverlayNode[] = []

export function NodesTable({ slug, actions }: { slug: string; actions: NodeActions }) {
  const nodes = useNodes(slug)
  const overlay = useOverlay(slug)
  const [opened, setOpened] = useState<string | null>(null)
  const rows = useMemo(() => byConcern(nodes.data ?? NONE), [nodes.data])
  const columns = useMemo(() => nodeColumns(rows, setOpened), [rows])
  const filters = useMemo(() => nodeFilters(rows), [rows])

  if (!nodes.data) {
    if (!nodes.error) return <NodesWaiting />
    return (
      <FailedState title="The nodes could not be loaded." onRetry={nodes.retry}>
        {nodes.error.message}
      </FailedState>
    )
  }
  const may = overlay.data !== undefined && roleReaches(overlay.data.role, 'operator')
  const node = rows.find((n) => n.name === opened)
  return (
    <>
      <Freshness of={nodes} />
      <DataTable
        caption="Nodes of this overlay"
        columns={columns}
        rows={rows}
        rowKey={(n) => n.name}
        csvName={`${slug}-nodes`}
        search="Find by name, key=value, version, error"
        filters={filters}
        empty={<NoNodes slug={slug} may={may} />}
      />
      {node ? (
        <NodeSheet
          slug={slug}
          node={node}
          actions={may && (!node.partner || overlay.data?.standing === 'owner') ? actions : null}
          onClose={() => setOpened(null)}
          onDone={nodes.retry}
        />
      ) : null}
    </>
  )
}

function NoNodes({ slug, may }: { slug: string; may: boolean }) {
  return (
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
  )
}

export function NodesWaiting() {
  return <Waiting label="Loading the nodes" className="h-[32rem]" />
}
