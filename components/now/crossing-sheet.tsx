'use client'

import Link from 'next/link'
import { useMemo } from 'react'
import { useCut, useNodes, useOverlay, useReading } from '@/components/live/hooks'
import { type Column, DataTable, EmptyState, FailedState, Note, Sheet, Time, Waiting } from '@/components/ui'
import { SHARE, WEIGHT } from '@/components/weak/link-columns'
import type { Cut, OverlayLink } from '@/lib/data/dto'
import { ifItGoes, whyHidden } from '@/lib/face/crossing'
import { formatCount, formatLink, formatReading } from '@/lib/face/format'
import { overlayPageUrls } from '@/lib/face/urls'
import { headlineLambda2 } from '@/lib/face/weak-links'

export function CrossingSheet({ slug }: { slug: string }) {
  const cut = useCut(slug)
  const reading = useReading(slug)
  const overlay = useOverlay(slug)
  const nodes = useNodes(slug)
  const unheard = useMemo(
    () => new Set((nodes.data ?? []).filter((n) => n.state === 'unheard').map((n) => n.name)),
    [nodes.data],
  )
  const measured = reading.data?.coverage.linksMeasured
  const total = cut.data?.crossingLinks ?? null
  const silent = reading.data?.treatAsSplit ?? false

  return (
    <Sheet
      heading="Crossing links"
      aside={
        total === null || measured === undefined
          ? null
          : silent
            ? `${total} at the last reading`
            : `${total} of ${measured} measured`
      }
    >
      {cut.data === undefined ? (
        cut.error ? (
          <FailedState quiet title="The cut could not be loaded." onRetry={cut.retry}>
            {cut.error.message}
          </FailedState>
        ) : (
          <Waiting label="Loading the crossing links" className="h-40" />
        )
      ) : cut.data === null || !cut.data.sides ? (
        <p className="text-soft">
          {cut.data?.withheld ?? 'No cut stands out, so no link is one that holds the overlay together.'}
        </p>
      ) : (
        <CrossingLinks
          slug={slug}
          cut={cut.data}
          lambda2={reading.data ? headlineLambda2(reading.data) : null}
          disclosure={overlay.data?.disclosure ?? 'sealed'}
          silent={silent}
          unheard={unheard}
        />
      )}
    </Sheet>
  )
}

function CrossingLinks(props: {
  slug: string
  cut: Cut
  lambda2: number | null
  disclosure: 'sealed' | 'flagged' | 'named'
  silent: boolean
  /** Names of unheard nodes. */
  unheard: ReadonlySet<string>
}) {
  const { slug, cut, lambda2, disclosure, silent, unheard } = props
  const why = whyHidden(cut, disclosure)
  const columns = useMemo(
    () => columnsFor(slug, lambda2, cut.crossingLinks, unheard),
    [slug, lambda2, cut.crossingLinks, unheard],
  )
  return (
    <div className="space-y-3">
      {cut.links.length > 0 ? (
        <DataTable
          caption="Links over the weak cut"
          columns={columns}
          rows={cut.links}
          rowKey={(l) => `${l.a}\n${l.b}`}
          stacks
          csvName={`${slug}-crossing-links`}
          initialSort={{ id: 'share', descending: true }}
          empty={null}
        />
      ) : cut.crossingLinks === 0 ? (
        <EmptyState title="No link crosses between the sides." />
      ) : (
        <p className="font-figures text-xl">
          {formatCount(cut.crossingLinks ?? 0, 'link')}
          {silent
            ? ', none heard since'
            : cut.crossingWeight === null
              ? ''
              : `, delivering ${formatReading(cut.crossingWeight)} together`}
        </p>
      )}
      {why ? <Note>{why}</Note> : null}
      <p className="text-sm">
        <Link href={overlayPageUrls(slug).weak} className="rule-link">
          Look into the weak place: what it follows, and its links over time
        </Link>
      </p>
    </div>
  )
}

function columnsFor(
  slug: string,
  lambda2: number | null,
  crossingLinks: number | null,
  unheard: ReadonlySet<string>,
): Column<OverlayLink>[] {
  return [
    {
      id: 'link',
      header: 'link',
      value: (l) => formatLink(l.a, l.b),
      cell: (l) => (
        <Link
          href={overlayPageUrls(slug).link(l.a, l.b)}
          className="rule-link wrap-anywhere sm:whitespace-nowrap"
        >
          {formatLink(l.a, l.b)}
        </Link>
      ),
    },
    { ...WEIGHT, header: 'delivered' },
    SHARE,
    {
      id: 'without',
      header: 'if it goes',
      words: true,
      value: (l) => ifItGoes(l, lambda2, crossingLinks, unheard),
      cell: (l) =>
        l.state === 'lost' ? (
          <>
            last heard <Time at={l.heardAt} show="moment" />
          </>
        ) : (
          (ifItGoes(l, lambda2, crossingLinks, unheard) ?? '–')
        ),
    },
  ]
}
