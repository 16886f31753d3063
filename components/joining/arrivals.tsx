'use client'

import { useRef } from 'react'
import { useNodes } from '@/components/live/hooks'
import { StateMark } from '@/components/nodes/state-mark'
import { EmptyState, FailedState, LinkButton, Time, Waiting } from '@/components/ui'
import type { OverlayNode } from '@/lib/data/dto'
import { formatCount } from '@/lib/face/format'
import { compareCells } from '@/lib/face/sort'

const SHOWN = 12

/** Agents as they enrol and are first heard, the latest first. */
export function Arrivals({ slug }: { slug: string }) {
  const nodes = useNodes(slug)
  const order = useArrivalOrder()
  if (!nodes.data) {
    if (!nodes.error) return <Waiting label="Loading the agents" className="h-40" />
    return (
      <FailedState quiet title="The agents could not be loaded." onRetry={nodes.retry}>
        {nodes.error.message}
      </FailedState>
    )
  }
  if (nodes.data.length === 0) {
    return <EmptyState title="No agent has enrolled yet.">Each appears here by itself as it does.</EmptyState>
  }
  const latest = order(nodes.data).slice(0, SHOWN)
  return (
    <div>
      <p role="status" className="sr-only">
        {formatCount(nodes.data.length, 'agent')} enrolled
      </p>
      <ul className="grid gap-x-8 sm:grid-cols-2">
        {latest.map((n) => (
          <li key={n.name} className="flex flex-wrap items-baseline gap-x-4 border-b border-hairline py-2">
            <span className="font-medium">{n.name}</span>
            <StateMark state={n.state} />
            <span className="text-sm text-soft">
              {n.degree === null ? '' : `${formatCount(n.degree, 'link')} · `}
              {n.heardAt ? (
                <>
                  heard <Time at={n.heardAt} />
                </>
              ) : (
                'enrolled, not heard yet'
              )}
            </span>
          </li>
        ))}
      </ul>
      <p className="mt-3">
        <LinkButton kind="quiet" href={`/overlays/${slug}/nodes`} className="-ml-2">
          All {formatCount(nodes.data.length, 'node')}
        </LinkButton>
      </p>
    </div>
  )
}

/** Those that came while the page was open first, the latest on top; the others by name. Nothing moves otherwise. */
function useArrivalOrder() {
  const seen = useRef<Map<string, number> | null>(null)
  return (nodes: readonly OverlayNode[]): OverlayNode[] => {
    const turn = seen.current === null ? 0 : Math.max(0, ...seen.current.values()) + 1
    seen.current ??= new Map()
    for (const { name } of nodes) if (!seen.current.has(name)) seen.current.set(name, turn)
    const at = (n: OverlayNode) => seen.current?.get(n.name) ?? 0
    return [...nodes].sort((p, q) => at(q) - at(p) || compareCells(p.name, q.name))
  }
}
