'use client'

import { useRef } from 'react'
import { TakeAlong } from '@/components/export/take-along'
import { Freshness } from '@/components/live/freshness'
import { useCut, useLinks, useNodes, useReading } from '@/components/live/hooks'
import { Stretch } from '@/components/stretch/stretch'
import { EmptyState, FailedState, Lambda, Sheet, Waiting } from '@/components/ui'
import { unplacedRemark } from '@/lib/face/stretch-sentence'

export function StretchSheet({ slug }: { slug: string }) {
  const nodes = useNodes(slug)
  const links = useLinks(slug)
  const cut = useCut(slug)
  const reading = useReading(slug)
  const drawing = useRef<HTMLDivElement>(null)
  const sides = cut.data?.sides ?? reading.data?.sides ?? null
  const remark =
    unplacedRemark(nodes.data ?? [], sides) ??
    (sides ? (
      <>
        left to right: Fiedler value · a tauter, thicker link carries more of <Lambda n={2} />
      </>
    ) : (
      (cut.data?.withheld ?? (reading.data ? 'no sides are drawn, since no cut stands out' : ''))
    ))

  return (
    <Sheet heading="Stretch" aside={remark}>
      <Freshness of={nodes} unless={reading} />
      {nodes.data ? (
        nodes.data.length > 0 ? (
          <>
            <div ref={drawing}>
              <Stretch
                nodes={nodes.data}
                links={links.data ?? []}
                reading={reading.data ?? null}
                cut={cut.data ?? null}
              />
            </div>
            <TakeAlong slug={slug} drawing={drawing} of="stretch" />
          </>
        ) : (
          <EmptyState title="No nodes to draw yet.">They appear here as their agents enrol.</EmptyState>
        )
      ) : nodes.error ? (
        <FailedState quiet title="The nodes could not be loaded." onRetry={nodes.retry}>
          {nodes.error.message}
        </FailedState>
      ) : (
        <Waiting label="Loading the nodes" className="h-[28rem]" />
      )}
    </Sheet>
  )
}
