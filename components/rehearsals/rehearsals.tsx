'use client'

import { Freshness } from '@/components/live/freshness'
import { useLinks, useNodes, useRehearsals, useWindows } from '@/components/live/hooks'
import { Coverage } from '@/components/now/coverage'
import { EmptyState, FailedState, LinkButton, Note, PageHeading, Sheet, Waiting } from '@/components/ui'
import type { Overlay, OverlayLink } from '@/lib/data/dto'
import { initialDraft, isOpen, type Prefill, takableOf } from '@/lib/face/rehearsal'
import { RehearsalCautions } from './cautions'
import { HistoryTable } from './history-table'
import { StartForm } from './start-form'
import type { RehearsalActions } from './types'
import { UnderWay } from './under-way'

export interface RehearsalsProps {
  slug: string
  disclosure: Overlay['disclosure']
  prefill: Prefill
  actions: RehearsalActions
}

/** What would be left without some nodes or links: asked of walkers, while all of it stays in place. */
export function Rehearsals({ slug, disclosure, prefill, actions }: RehearsalsProps) {
  const rehearsals = useRehearsals(slug)
  const may = rehearsals.data?.mayStart ?? false
  const items = rehearsals.data?.items ?? []
  return (
    <>
      <PageHeading title="Rehearsals">
        Would it hold without them? Walkers try it beside the live overlay, and the answer comes within a
        minute or two. Nothing real is taken away.
      </PageHeading>
      <div className="space-y-5">
        <Coverage slug={slug} />
        <Freshness of={rehearsals} />
        {rehearsals.data ? (
          <>
            <UnderWay
              slug={slug}
              items={items.filter(isOpen)}
              most={rehearsals.data.most}
              cancel={may ? actions.cancel : null}
              onDone={rehearsals.retry}
            />
            {may ? (
              <Start {...{ slug, disclosure, prefill, actions, rehearsals }} />
            ) : (
              <Note>Rehearsals are started by operators and owners. You see each answer here.</Note>
            )}
            <Sheet heading="Rehearsed" aside={items.length > 0 ? 'the newest 100 at most' : null}>
              <HistoryTable slug={slug} rehearsals={items} may={may} />
            </Sheet>
          </>
        ) : rehearsals.error ? (
          <FailedState title="The rehearsals could not be loaded." onRetry={rehearsals.retry}>
            {rehearsals.error.message}
          </FailedState>
        ) : (
          <Waiting label="Loading the rehearsals" className="h-[46rem]" />
        )}
        <RehearsalCautions />
      </div>
    </>
  )
}

const NO_LINKS: OverlayLink[] = []

function Start(props: RehearsalsProps & { rehearsals: ReturnType<typeof useRehearsals> }) {
  const { slug, disclosure, prefill, actions, rehearsals } = props
  const nodes = useNodes(slug)
  const windows = useWindows(slug)
  const links = useLinks(disclosure === 'named' ? slug : null)
  const linksReady = disclosure !== 'named' || links.data !== undefined
  if (!nodes.data || !windows.data || !linksReady) {
    const error = nodes.error ?? windows.error ?? links.error
    if (!error) return <Waiting label="Loading what can be taken away" className="h-[34rem]" />
    return (
      <FailedState
        quiet
        title="What can be taken away could not be loaded."
        onRetry={() => {
          nodes.retry()
          windows.retry()
          links.retry()
        }}
      >
        {error.message}
      </FailedState>
    )
  }
  if (takableOf(nodes.data).length === 0)
    return (
      <EmptyState
        title="No node of yours has joined yet."
        actions={
          <LinkButton href={`/overlays/${encodeURIComponent(slug)}/joining`}>
            Create a joining code
          </LinkButton>
        }
      >
        Once agents walk there is something to rehearse.
      </EmptyState>
    )
  return (
    <StartForm
      slug={slug}
      from={{ disclosure, nodes: nodes.data, links: links.data ?? NO_LINKS }}
      windows={windows.data}
      initial={initialDraft(prefill, windows.data, rehearsals.data?.items ?? [])}
      window={prefill.window}
      start={actions.start}
      onStarted={rehearsals.retry}
    />
  )
}
