'use client'

import { useRef } from 'react'
import { TakeAlong } from '@/components/export/take-along'
import { Freshness } from '@/components/live/freshness'
import { useLinks, useNodesAt } from '@/components/live/hooks'
import { Explorer } from '@/components/stretch/explorer'
import { EmptyState, FailedState, Lambda, Sheet, Waiting } from '@/components/ui'
import type { WeakPlace } from '@/lib/data/weak-dto'
import { unplacedRemark } from '@/lib/face/stretch-sentence'
import { overlayPageUrls } from '@/lib/face/urls'
import { asCut } from '@/lib/face/weak-cut'

/** The stretch view of the moment looked at. Of a past one the links within the sides are not kept. */
export function StretchLarge({
  slug,
  at,
  place,
}: {
  slug: string
  at: string | null
  place: WeakPlace | null
}) {
  const nodes = useNodesAt(slug, at)
  const links = useLinks(slug)
  const drawing = useRef<HTMLDivElement>(null)
  const cut = place && asCut(place)
  const remark =
    (nodes.data && unplacedRemark(nodes.data, place?.sides ?? null)) ??
    (place?.sides ? (
      <>
        left to right: Fiedler value · a tauter, thicker link carries more of <Lambda n={2} />
      </>
    ) : (
      'left to right: Fiedler value · no sides are drawn'
    ))
  return (
    <Sheet
      heading="Stretch"
      aside={at === null ? remark : <>{remark} · links within the sides are not kept of past moments</>}
    >
      <Freshness of={nodes} />
      {nodes.data && place ? (
        nodes.data.length > 0 ? (
          <>
            <Explorer
              drawing={drawing}
              nodes={nodes.data}
              links={at === null ? (links.data ?? []) : place.links}
              reading={place.reading}
              cut={cut}
              follows={cut?.follows?.key ?? place.follows.labels[0]?.key ?? null}
              nodeHref={overlayPageUrls(slug).node}
            />
            <TakeAlong slug={slug} drawing={drawing} of="weak place" at={at} />
          </>
        ) : (
          <EmptyState title="No nodes to draw yet.">They appear here as their agents enrol.</EmptyState>
        )
      ) : nodes.error ? (
        <FailedState quiet title="The nodes could not be loaded." onRetry={nodes.retry}>
          {nodes.error.message}
        </FailedState>
      ) : (
        <Waiting label="Loading the nodes" className="h-[30rem]" />
      )}
    </Sheet>
  )
}
