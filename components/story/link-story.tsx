'use client'

import Link from 'next/link'
import { Freshness } from '@/components/live/freshness'
import { useLinkStory, useReading } from '@/components/live/hooks'
import { StateMark } from '@/components/nodes/state-mark'
import { RehearseLink } from '@/components/rehearsals/rehearse-link'
import {
  type Column,
  EmptyState,
  FailedState,
  type Figure,
  Lambda,
  Note,
  PageHeading,
  Sheet,
  SideMark,
  Time,
  TitleBlock,
  useNow,
  Waiting,
} from '@/components/ui'
import type { LinkStory } from '@/lib/data/weak-dto'
import { formatHigh, formatLink, formatShare } from '@/lib/face/format'
import type { Range } from '@/lib/face/range'
import { takableOf } from '@/lib/face/rehearsal'
import { overlayPageUrls } from '@/lib/face/urls'
import { ageText } from '@/lib/face/weak'
import { HistorySheet } from './history-sheet'
import { Mentions } from './mentions'
import { useRange } from './use-range'

/** One link over time. */
export function LinkStoryView({ slug, a, b }: { slug: string; a: string; b: string }) {
  const range = useRange()
  const story = useLinkStory(slug, { a, b }, range)
  return (
    <>
      <PageHeading title={formatLink(a, b)}>
        <Link href={overlayPageUrls(slug).weak} className="rule-link">
          The weak place
        </Link>
      </PageHeading>
      <div className="space-y-5">
        <Freshness of={story} />
        {story.data ? (
          <Story slug={slug} story={story.data} range={range} />
        ) : story.error ? (
          <FailedState title={`${formatLink(a, b)} could not be loaded.`} onRetry={story.retry}>
            {story.error.message}
          </FailedState>
        ) : (
          <Waiting label="Loading the link" className="h-96" />
        )}
      </div>
    </>
  )
}

function Story({ slug, story, range }: { slug: string; story: LinkStory; range: Range }) {
  const now = useNow()
  const { link, disclosure } = story
  const urls = overlayPageUrls(slug)
  return (
    <>
      <div className="grid gap-x-12 gap-y-4 lg:grid-cols-[minmax(0,1fr)_minmax(20rem,26rem)]">
        <div className="space-y-2">
          {[story.a, story.b].map((end) => (
            <p key={end.name} className="flex flex-wrap gap-x-5 gap-y-1">
              <Link href={urls.node(end.name)} className="rule-link font-medium">
                {end.name}
              </Link>
              <StateMark state={end.state} />
              {end.side ? <SideMark side={end.side} /> : null}
              {Object.entries(end.labels).map(([key, value]) => (
                <span key={key} className="wrap-anywhere">
                  <span className="text-soft">{key}</span> {value}
                </span>
              ))}
            </p>
          ))}
          {link?.state === 'live' && disclosure === 'named' && takableOf([story.a, story.b]).length === 2 ? (
            <RehearseLink slug={slug} exclude={{ links: [[link.a, link.b]] }}>
              Rehearse going without it
            </RehearseLink>
          ) : null}
          {link ? null : <Note>{notNamed(disclosure)}</Note>}
          {link?.state === 'lost' ? (
            <Note>
              Only unheard agents name it: this is what they last said, <Time at={link.heardAt} show="both" />
              .
            </Note>
          ) : null}
        </div>
        {link ? <Figures slug={slug} story={story} nowMs={now} /> : null}
      </div>
      <LinkHistory story={story} range={range} nowMs={now} />
      <Sheet heading="Lost and found" aside={story.events.length > 0 ? 'newest first' : null}>
        {story.events.length > 0 ? (
          <ul>
            {story.events.map(({ id, at, text }) => (
              <li key={id} className="flex gap-4 border-t border-hairline py-1.5 first:border-t-0">
                <span className="w-40 shrink-0 text-soft">
                  <Time at={at} show="both" />
                </span>
                {text}
              </li>
            ))}
          </ul>
        ) : (
          <EmptyState title="Neither lost nor found since it is watched." />
        )}
      </Sheet>
      <Mentions mentions={story.incidents} what={formatLink(story.a.name, story.b.name)} />
    </>
  )
}

function notNamed(disclosure: LinkStory['disclosure']): string {
  if (disclosure === 'sealed')
    return 'This overlay is sealed: no link is named, so nothing is known of this one.'
  if (disclosure === 'flagged')
    return 'No agent names this link: in a flagged overlay one is named only when it carries much of the reading and both its ends consent.'
  return 'No agent names this link now: it is not there, or has not been reported yet.'
}

function Figures({ slug, story, nowMs }: { slug: string; story: LinkStory; nowMs: number | null }) {
  const reading = useReading(slug)
  const { link, since, without } = story
  if (!link) return null
  const isLast = link.crossing && reading.data?.crossingLinks === 1
  const figures: Figure[] = [
    {
      id: 'share',
      main: true,
      label: (
        <>
          share of <Lambda n={2} />
        </>
      ),
      value: link.share === null || link.state === 'lost' ? '–' : formatShare(link.share),
      remark: link.crossing
        ? 'crosses the weak cut'
        : story.a.side && story.b.side
          ? 'lies within one side'
          : 'no sides are drawn now',
    },
    {
      id: 'weight',
      label: 'weight',
      value: link.state === 'lost' ? 'lost' : link.weight.toFixed(2),
      remark: '1 is everything in time',
    },
    {
      id: 'age',
      label: 'named for',
      value: nowMs === null ? '–' : ageText(since, nowMs),
      remark: 'without a break',
    },
    {
      id: 'without',
      label: 'if it goes',
      value: isLast ? '0' : without === null ? '–' : `≤ ${formatHigh(without)}`,
      remark: isLast
        ? 'the overlay falls apart'
        : without === null
          ? 'not known now'
          : 'the reading, or lower',
    },
  ]
  return <TitleBlock label="The link in figures" figures={figures} />
}

function LinkHistory({ story, range, nowMs }: { story: LinkStory; range: Range; nowMs: number | null }) {
  const { course } = story
  return (
    <HistorySheet
      range={range}
      toMs={nowMs ?? course.at(-1)?.[0] ?? 0}
      rows={course.map(([atMs, weight, share]) => ({ at: new Date(atMs).toISOString(), weight, share }))}
      courses={[
        {
          heading: 'Share of the reading while it crossed',
          points: course.map(([atMs, , share]) => [atMs, share]),
          ...{ least: 0, most: 0.1, format: formatShare },
        },
        {
          heading: 'Weight',
          points: course.map(([atMs, weight]) => [atMs, weight]),
          ...{ least: 0, most: 1, format: (value) => value.toFixed(2) },
        },
      ]}
      table={{
        caption: 'The link at the moments that are kept',
        columns: MOMENTS,
        csvName: `${story.a.name}-${story.b.name}-history`,
      }}
      empty={{
        title: `It did not cross the cut in the last ${range.label}, as far as is kept.`,
        text: 'Links are kept while they cross the weak cut and are named. Choose a longer range to look further back.',
      }}
    />
  )
}

const MOMENTS: Column<{ at: string; weight: number; share: number | null }>[] = [
  { id: 'at', header: 'moment', value: ({ at }) => at, cell: ({ at }) => <Time at={at} show="moment" /> },
  {
    id: 'share',
    header: 'share',
    figures: true,
    value: ({ share }) => share,
    cell: ({ share }) => (share === null ? '–' : formatShare(share)),
  },
  {
    id: 'weight',
    header: 'weight',
    figures: true,
    value: ({ weight }) => weight,
    cell: ({ weight }) => weight.toFixed(2),
  },
]
