'use client'

import Link from 'next/link'
import { useMemo } from 'react'
import { type Column, DataTable, EmptyState, Note, Sheet, Time, useNow } from '@/components/ui'
import type { WeakLink, WeakPlace } from '@/lib/data/weak-dto'
import { ifItGoes, whyHidden } from '@/lib/face/crossing'
import { formatCount, formatLink, formatReading } from '@/lib/face/format'
import type { Range } from '@/lib/face/range'
import { stepMsOf } from '@/lib/face/story'
import { overlayPageUrls } from '@/lib/face/urls'
import { ageText, courseText, endLabel } from '@/lib/face/weak'
import { asCut } from '@/lib/face/weak-cut'
import { headlineOf, labelsOfEnds } from '@/lib/face/weak-links'
import { useNodesAt } from '../live/hooks'
import { SHARE, WEIGHT } from './link-columns'
import { Spark } from './spark'

export interface CrossingTableProps {
  slug: string
  place: WeakPlace
  range: Range
}

/** The links that hold the sides together, and what each of them carries. */
export function CrossingTable({ slug, place, range }: CrossingTableProps) {
  const { crossing, links, disclosure, reading } = place
  if (!crossing) return null
  const why = whyHidden(asCut(place), disclosure)
  return (
    <Sheet heading="Crossing links" aside={crossingAside(crossing.links, reading)}>
      <div className="space-y-3">
        {links.length > 0 ? (
          <Links slug={slug} place={place} range={range} />
        ) : crossing.links === 0 ? (
          <EmptyState title="No link crosses between the sides.">
            Linking any node of side a with any of side b joins the overlay again.
          </EmptyState>
        ) : (
          <p className="font-figures text-xl">
            {formatCount(crossing.links, 'link')}, delivering {formatReading(crossing.weight)} together
          </p>
        )}
        {why ? <Note>{why}</Note> : null}
        {links.length > 0 ? (
          <Note>
            “Or lower”: without the link the reading is at most this, never surely this. It holds for one link
            at a time; of several, take their shares together.
          </Note>
        ) : null}
      </div>
    </Sheet>
  )
}

/** While too few are heard hardly a link is measured: then it is what the last reading rested on. */
function crossingAside(links: number, { treatAsSplit, data, coverage }: WeakPlace['reading']): string {
  return treatAsSplit || data === 'unheard'
    ? `${links} at the last good reading`
    : `${links} of ${coverage.linksMeasured} measured`
}

function Links({ slug, place, range }: CrossingTableProps) {
  const now = useNow()
  const nodes = useNodesAt(slug, place.isNow ? null : place.at)
  const columns = useMemo(
    () => columnsFor({ slug, place, range, nowMs: now, nodes: nodes.data ?? [] }),
    [slug, place, range, now, nodes.data],
  )
  return (
    <DataTable
      caption="Links over the weak cut"
      columns={columns}
      rows={place.links}
      rowKey={(link) => `${link.a}\n${link.b}`}
      stacks
      csvName={`${slug}-weak-links`}
      search={place.links.length > 12 ? 'Find by name' : undefined}
      initialSort={{ id: 'share', descending: true }}
      empty={null}
    />
  )
}

interface ColumnsInput extends CrossingTableProps {
  nowMs: number | null
  nodes: Parameters<typeof labelsOfEnds>[1]
}

function columnsFor({ slug, place, range, nowMs, nodes }: ColumnsInput): Column<WeakLink>[] {
  const urls = overlayPageUrls(slug)
  const { lambda2, unheard } = headlineOf(place.reading, nodes)
  const key = endLabel(place.follows)
  const toMs = place.isNow ? (nowMs ?? Date.parse(place.at)) : Date.parse(place.at)
  const fromMs = toMs - range.seconds * 1000
  const most = Math.max(0.01, ...place.links.flatMap(({ course }) => course.map(([, , share]) => share ?? 0)))
  const goes = (link: WeakLink) => ifItGoes(link, lambda2, place.crossing?.links ?? null, unheard)
  const isLost = ({ state }: WeakLink) => state === 'lost'
  return [
    {
      id: 'link',
      header: 'link',
      value: (link) => formatLink(link.a, link.b),
      cell: (link) => (
        <Link
          href={urls.link(link.a, link.b)}
          className="rule-link wrap-anywhere font-medium sm:whitespace-nowrap"
        >
          {formatLink(link.a, link.b)}
        </Link>
      ),
    },
    {
      id: 'ends',
      header: key === null ? 'ends' : `ends, by ${key}`,
      value: (link) =>
        labelsOfEnds(link, nodes, key)
          .map(({ name, label }) => label ?? name)
          .join(' – '),
      cell: (link) => (
        <span className="flex flex-wrap gap-x-3">
          {labelsOfEnds(link, nodes, key).map(({ name, label }) => (
            <Link key={name} href={urls.node(name)} className="rule-link whitespace-nowrap">
              {label === null ? name : `${name}, ${label}`}
            </Link>
          ))}
        </span>
      ),
    },
    SHARE,
    {
      id: 'course',
      header: `its course over ${range.label}`,
      value: (link) => courseText(link.course),
      cell: (link) =>
        link.course.length < 2 ? (
          '–'
        ) : (
          <Spark
            points={link.course.map(([atMs, , share]) => [atMs, share])}
            fromMs={fromMs}
            toMs={toMs}
            most={most}
            stepMs={stepMsOf(range)}
            label={`share over ${range.label}: ${courseText(link.course) ?? 'not known'}`}
          />
        ),
    },
    WEIGHT,
    {
      id: 'age',
      header: 'named for',
      value: (link) => link.since?.at ?? null,
      cell: (link) => <span className="whitespace-nowrap">{ageText(link.since, toMs)}</span>,
    },
    {
      id: 'without',
      header: 'if it goes',
      words: true,
      value: goes,
      cell: (link) =>
        isLost(link) ? (
          <>
            last heard <Time at={link.heardAt} show="moment" />
          </>
        ) : (
          (goes(link) ?? '–')
        ),
    },
  ]
}
