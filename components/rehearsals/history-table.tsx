'use client'

import Link from 'next/link'
import { useMemo } from 'react'
import { type Column, DataTable, EmptyState, Mark, type TableFilter, Time } from '@/components/ui'
import type { RehearsalDto } from '@/lib/data/rehearsal-dto'
import { formatReading } from '@/lib/face/format'
import { excludedWords, rehearsalPage, stateShape, stateWord } from '@/lib/face/rehearsal'
import { incidentUrls } from '@/lib/face/urls'

export interface HistoryTableProps {
  slug: string
  rehearsals: readonly RehearsalDto[]
  may: boolean
}

export function HistoryTable({ slug, rehearsals, may }: HistoryTableProps) {
  const columns = useMemo(() => columnsFor(slug), [slug])
  const filters = useMemo(() => filtersFor(rehearsals), [rehearsals])
  return (
    <DataTable
      caption="Rehearsals of this overlay"
      columns={columns}
      rows={rehearsals}
      rowKey={({ id }) => id}
      stacks
      search="Search"
      filters={filters}
      csvName={`${slug}-rehearsals`}
      initialSort={{ id: 'asked', descending: true }}
      empty={
        <EmptyState title="Nothing has been rehearsed yet.">
          {may
            ? 'Choose above what would be away; the answer comes within a minute or two.'
            : 'What operators rehearse appears here with its answer.'}
        </EmptyState>
      }
    />
  )
}

function columnsFor(slug: string): Column<RehearsalDto>[] {
  return [
    {
      id: 'what',
      header: 'taken away',
      words: true,
      value: ({ exclude }) => excludedWords(exclude),
      cell: ({ id, exclude, note }) => (
        <>
          <Link href={rehearsalPage(slug, id)} className="rule-link font-medium">
            {excludedWords(exclude)}
          </Link>
          {note ? <span className="block text-sm text-soft">{note}</span> : null}
        </>
      ),
    },
    {
      id: 'answer',
      header: 'answer',
      value: stateWord,
      cell: (rehearsal) => (
        <Mark shape={stateShape(rehearsal)} grave={rehearsal.answer === 'splits'}>
          {stateWord(rehearsal)}
        </Mark>
      ),
    },
    figure('would', 'would remain', ({ reading, answer }) =>
      answer === null ? null : (reading?.lambda2 ?? null),
    ),
    figure('live', 'live beside it', ({ live }) => live?.lambda2 ?? null),
    figure('floor', 'floor', ({ floor }) => floor?.lambda2 ?? null),
    {
      id: 'asked',
      header: 'asked',
      value: ({ askedAt }) => askedAt,
      cell: ({ askedAt, by }) => (
        <span>
          <Time at={askedAt} show="both" />
          {by ? <span className="block text-sm text-soft">{by}</span> : null}
        </span>
      ),
    },
    {
      id: 'incident',
      header: 'incident',
      value: ({ incident }) => incident,
      cell: ({ incident }) =>
        incident === null ? (
          '–'
        ) : (
          <Link href={incidentUrls(incident).page} className="rule-link font-figures">
            {incident}
          </Link>
        ),
    },
    unshown('by', 'by', ({ by }) => by),
    unshown('note', 'note', ({ note }) => note),
    unshown('state', 'state', ({ state }) => state),
    unshown('level', 'level', ({ level }) => level),
    unshown('taken', 'nodes taken away', ({ taken }) => taken),
    unshown('remain', 'nodes that remain', ({ remain }) => remain),
    unshown('low', 'would remain, low', ({ reading }) => reading?.low ?? null),
    unshown('high', 'would remain, high', ({ reading }) => reading?.high ?? null),
    unshown('crossing', 'crossing links', ({ crossingLinks }) => crossingLinks),
    unshown('verdict', 'verdict', ({ verdict }) => verdict),
    unshown('starts', 'to begin', ({ startsAt }) => startsAt),
    unshown('started', 'begun', ({ startedAt }) => startedAt),
    unshown('ended', 'ended', ({ endedAt }) => endedAt),
  ]
}

function figure(
  id: string,
  header: string,
  value: (rehearsal: RehearsalDto) => number | null,
): Column<RehearsalDto> {
  return {
    id,
    header,
    figures: true,
    value,
    cell: (rehearsal) => {
      const found = value(rehearsal)
      return found === null ? '–' : formatReading(found)
    },
  }
}

function unshown(id: string, header: string, value: Column<RehearsalDto>['value']): Column<RehearsalDto> {
  return { id, header, value, shown: false }
}

/** Only what tells rows apart. */
function filtersFor(rehearsals: readonly RehearsalDto[]): TableFilter<RehearsalDto>[] {
  const answers = [...new Set(rehearsals.map(stateWord))].sort()
  const people = [...new Set(rehearsals.flatMap(({ by }) => by ?? []))].sort()
  const option = (value: string) => ({ value, label: value })
  const all: TableFilter<RehearsalDto>[] = [
    {
      id: 'answer',
      label: 'Answer',
      options: answers.map(option),
      match: (rehearsal, value) => stateWord(rehearsal) === value,
    },
    { id: 'by', label: 'By', options: people.map(option), match: ({ by }, value) => by === value },
  ]
  return all.filter(({ options }) => options.length > 1)
}
