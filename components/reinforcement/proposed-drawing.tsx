'use client'

import { useMemo, useRef } from 'react'
import { TakeAlong } from '@/components/export/take-along'
import { useLinks, useNodes, useReading } from '@/components/live/hooks'
import { Drawing } from '@/components/stretch/drawing'
import { useWidth } from '@/components/stretch/use-width'
import { FailedState, Sheet, Waiting } from '@/components/ui'
import type { Reinforcement } from '@/lib/data/reinforcement-dto'
import { formatCount } from '@/lib/face/format'
import { proposedPaths } from '@/lib/face/reinforcement'
import { laneKeys, layoutStretch } from '@/lib/face/stretch'

const GONE = new Set(['left', 'revoked'])

/** The stretch view with the proposed links dashed over it; the table of proposals says the same in words. */
export function ProposedDrawing({ slug, found }: { slug: string; found: Reinforcement }) {
  const all = useNodes(slug)
  const links = useLinks(slug).data
  const reading = useReading(slug).data ?? null
  const frame = useRef<HTMLDivElement>(null)
  const width = useWidth(frame)
  const nodes = useMemo(() => (all.data ?? []).filter(({ state }) => !GONE.has(state)), [all.data])
  const layout = useMemo(
    () =>
      width === null || nodes.length === 0
        ? null
        : layoutStretch({
            ...{ nodes, links: links ?? [], laneKey: laneKeys(nodes, null)[0] ?? null },
            sided: reading?.sides != null,
            crossingLinks: reading?.crossingLinks ?? null,
            silent: reading?.treatAsSplit ?? false,
            width: Math.max(260, width),
          }),
    [nodes, links, reading?.sides, reading?.crossingLinks, reading?.treatAsSplit, width],
  )
  const proposed = layout ? proposedPaths(layout, found.proposals) : []
  if (found.proposals.length === 0) return null
  return (
    <Sheet heading="Where they would go" aside="dashed: proposed">
      {all.data === undefined && !all.error ? <Waiting label="Loading the nodes" className="h-80" /> : null}
      {all.data === undefined && all.error ? (
        <FailedState quiet title="The nodes could not be loaded." onRetry={all.retry}>
          {all.error.message}
        </FailedState>
      ) : null}
      <div ref={frame} className="relative overflow-hidden">
        {layout ? (
          <>
            <Drawing
              layout={layout}
              sentence={`${formatCount(nodes.length, 'node')} by Fiedler value, ${formatCount(proposed.length, 'proposed link')} dashed`}
              chosen={null}
              onChoose={ignore}
            />
            <svg
              viewBox={`0 0 ${layout.width} ${layout.height}`}
              width={layout.width}
              height={layout.height}
              aria-hidden="true"
              data-drawn
              className="pointer-events-none absolute top-0 left-0 block max-w-full stroke-ink"
              fill="none"
            >
              {proposed.map(({ key, path, ends }) => (
                <g key={key}>
                  <path d={path} strokeWidth={2} strokeDasharray="7 5" />
                  {ends.map(({ x, y }) => (
                    <circle key={`${x} ${y}`} cx={x} cy={y} r={layout.dotRadius + 3.5} strokeWidth={1.75} />
                  ))}
                </g>
              ))}
            </svg>
          </>
        ) : null}
      </div>
      {layout ? <TakeAlong slug={slug} drawing={frame} of="proposed links" /> : null}
    </Sheet>
  )
}

const ignore = () => {}
