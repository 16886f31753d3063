'use client'

import Link from 'next/link'
import { Freshness } from '@/components/live/freshness'
import { useNodeStory } from '@/components/live/hooks'
import { STATE_WORDS, StateMark } from '@/components/nodes/state-mark'
import { RehearseLink } from '@/components/rehearsals/rehearse-link'
import {
  type Column,
  DataTable,
  EmptyState,
  FailedState,
  Note,
  PageHeading,
  Sheet,
  SideMark,
  Time,
  useNow,
  Waiting,
} from '@/components/ui'
import type { NodeStory } from '@/lib/data/weak-dto'
import { formatShare, formatValue } from '@/lib/face/format'
import { nodeConcerns } from '@/lib/face/node-concerns'
import type { Range } from '@/lib/face/range'
import { takableOf } from '@/lib/face/rehearsal'
import { hiddenLinksText, type Neighbour, neighboursOf } from '@/lib/face/story'
import { overlayPageUrls } from '@/lib/face/urls'
import { HistorySheet } from './history-sheet'
import { Mentions } from './mentions'
import { useRange } from './use-range'

/** One node over time. */
export function NodeStoryView({ slug, name }: { slug: string; name: string }) {
  const range = useRange()
  const story = useNodeStory(slug, name, range)
  return (
    <>
      <PageHeading title={name}>
        <Link href={overlayPageUrls(slug).nodes} className="rule-link">
          All nodes
        </Link>
      </PageHeading>
      <div className="space-y-5">
        <Freshness of={story} />
        {story.data ? (
          <Story slug={slug} story={story.data} range={range} />
        ) : story.error ? (
          <FailedState title={`${name} could not be loaded.`} onRetry={story.retry}>
            {story.error.message}
          </FailedState>
        ) : (
          <Waiting label={`Loading ${name}`} className="h-96" />
        )}
      </div>
    </>
  )
}

function Story({ slug, story, range }: { slug: string; story: NodeStory; range: Range }) {
  const { node, links, incidents } = story
  const concerns = nodeConcerns(node)
  const hidden = hiddenLinksText(story)
  return (
    <>
      <div className="space-y-2">
        <p className="flex flex-wrap gap-x-5 gap-y-1">
          <StateMark state={node.state} />
          {node.side ? <SideMark side={node.side} /> : null}
          {Object.entries(node.labels).map(([key, value]) => (
            <span key={key} className="wrap-anywhere">
              <span className="text-soft">{key}</span> {value}
            </span>
          ))}
          {node.heardAt ? (
            <span>
              <span className="text-soft">last heard</span> <Time at={node.heardAt} />
            </span>
          ) : null}
        </p>
        {takableOf([node]).length > 0 ? (
          <RehearseLink slug={slug} exclude={{ nodes: [node.name] }}>
            Rehearse going without it
          </RehearseLink>
        ) : null}
        {concerns.length > 0 ? <Note>To look at: {concerns.join('; ')}</Note> : null}
      </div>
      <NodeHistory story={story} range={range} />
      <Sheet heading="Neighbours" aside={links.length > 0 ? `${links.length} named` : null}>
        <DataTable
          caption={`Links of ${node.name}`}
          columns={neighbourColumns(slug, node.name)}
          rows={neighboursOf(story)}
          rowKey={(neighbour) => neighbour.name}
          csvName={`${node.name}-links`}
          stacks
          initialSort={{ id: 'share', descending: true }}
          empty={hidden ? null : <EmptyState title="It has no links now." />}
        />
        {hidden ? <Note className="mt-3">{hidden}</Note> : null}
      </Sheet>
      <Mentions mentions={incidents} what={node.name} />
    </>
  )
}

function NodeHistory({ story, range }: { story: NodeStory; range: Range }) {
  const now = useNow()
  const { course, node } = story
  return (
    <HistorySheet
      range={range}
      toMs={now ?? Date.parse(course.at(-1)?.at ?? '')}
      rows={course}
      courses={[
        {
          heading: 'Fiedler value; its sign may turn when another cut is the weakest',
          points: course.map(({ at, value }) => [Date.parse(at), value]),
          ...{ least: -1, most: 1, format: formatValue },
        },
        {
          heading: 'Weight on its links together',
          points: course.map(({ at, weightedDegree }) => [Date.parse(at), weightedDegree]),
          ...{ least: 0, most: 1, format: (value) => value.toFixed(2) },
        },
      ]}
      table={{
        caption: 'The node at the moments that are kept',
        columns: MOMENTS,
        csvName: `${node.name}-history`,
      }}
      empty={{
        title: `No moment of the last ${range.label} is kept of it.`,
        text: 'One is kept each minute while the overlay is evaluated. Choose a longer range to look further back.',
      }}
    />
  )
}

type Kept = NodeStory['course'][number]
const MOMENTS: Column<Kept>[] = [
  { id: 'at', header: 'moment', value: ({ at }) => at, cell: ({ at }) => <Time at={at} show="moment" /> },
  {
    id: 'value',
    header: 'value',
    figures: true,
    value: ({ value }) => value,
    cell: ({ value }) => (value === null ? '–' : formatValue(value)),
  },
  {
    id: 'side',
    header: 'side',
    value: ({ side }) => side,
    cell: ({ side }) => (side ? <SideMark side={side}>{side}</SideMark> : '–'),
  },
  { id: 'degree', header: 'links', figures: true, value: ({ degree }) => degree },
  {
    id: 'weight',
    header: 'weight',
    figures: true,
    value: ({ weightedDegree }) => weightedDegree,
    cell: ({ weightedDegree }) => weightedDegree?.toFixed(2) ?? '–',
  },
  { id: 'state', header: 'state', value: ({ state }) => STATE_WORDS[state] },
]

function neighbourColumns(slug: string, own: string): Column<Neighbour>[] {
  const urls = overlayPageUrls(slug)
  return [
    {
      id: 'neighbour',
      header: 'neighbour',
      value: ({ name }) => name,
      cell: ({ name }) => (
        <Link href={urls.node(name)} className="rule-link font-medium whitespace-nowrap">
          {name}
        </Link>
      ),
    },
    {
      id: 'share',
      header: 'share of reading',
      figures: true,
      value: ({ share }) => share,
      cell: ({ share }) => (share === null ? '–' : formatShare(share)),
    },
    {
      id: 'weight',
      header: 'weight',
      figures: true,
      value: ({ state, weight }) => (state === 'lost' ? 'lost' : weight),
      cell: ({ state, weight }) => (state === 'lost' ? 'lost' : weight.toFixed(2)),
    },
    {
      id: 'crossing',
      header: 'crosses the cut',
      value: ({ crossing }) => (crossing ? 'yes' : 'no'),
    },
    {
      id: 'page',
      header: 'link',
      data: false,
      value: () => null,
      cell: ({ name }) => (
        <Link href={urls.link(own, name)} className="rule-link whitespace-nowrap">
          the link over time<span className="sr-only"> to {name}</span>
        </Link>
      ),
    },
  ]
}
