'use client'

import Link from 'next/link'
import { Freshness } from '@/components/live/freshness'
import { useOverlay, useReading, useReadingThen, useRehearsal } from '@/components/live/hooks'
import { LinkButton, Outcome, Time, useNow } from '@/components/ui'
import { roleReaches } from '@/lib/auth/permissions'
import type { RehearsalDto } from '@/lib/data/rehearsal-dto'
import { cx } from '@/lib/face/cx'
import { formatReading } from '@/lib/face/format'
import {
  detailOf,
  excludedInFull,
  headline,
  isOpen,
  rehearsalsPage,
  rehearseHref,
} from '@/lib/face/rehearsal'
import { incidentUrls } from '@/lib/face/urls'
import { CancelButton, RepeatButton } from './acts'
import { RehearsalCautions } from './cautions'
import { Comparison } from './comparison'
import { Progress } from './progress'
import type { RehearsalActions } from './types'
import { Waves } from './waves'

export interface RehearsalPageProps {
  slug: string
  initial: RehearsalDto
  actions: RehearsalActions
}

/** One rehearsal: the answer first, then what it rests on. */
export function RehearsalPage({ slug, initial, actions }: RehearsalPageProps) {
  const live = useRehearsal(slug, initial.id)
  const overlay = useOverlay(slug)
  const rehearsal = live.data ?? initial
  const now = useReading(slug)
  const then = useReadingThen(slug, rehearsal.endedAt)
  const may = overlay.data !== undefined && roleReaches(overlay.data.role, 'operator')
  return (
    <div className="space-y-6">
      <Freshness of={live} />
      <Head slug={slug} rehearsal={rehearsal} />
      <div className="flex flex-wrap gap-2.5">
        {may && isOpen(rehearsal) ? (
          <CancelButton slug={slug} id={rehearsal.id} cancel={actions.cancel} onDone={live.retry} />
        ) : null}
        {may && !isOpen(rehearsal) ? (
          <>
            <RepeatButton slug={slug} rehearsal={rehearsal} start={actions.start} kind="main" />
            <LinkButton href={rehearseHref(slug, { from: rehearsal.id })}>Change it and rehearse</LinkButton>
          </>
        ) : null}
        <LinkButton kind={may ? 'quiet' : 'plain'} href={rehearsalsPage(slug)}>
          All rehearsals
        </LinkButton>
      </div>
      <Comparison
        rehearsal={rehearsal}
        beside={(rehearsal.endedAt === null ? now.data : (then.data ?? null)) ?? null}
      />
      <Waves slug={slug} rehearsal={rehearsal} may={may} />
      <RehearsalCautions />
    </div>
  )
}

function Head({ slug, rehearsal }: { slug: string; rehearsal: RehearsalDto }) {
  const now = useNow()
  const { answer, verdict, state, floor } = rehearsal
  const detail = detailOf(rehearsal)
  return (
    <header>
      <p className="flex flex-wrap gap-x-4 gap-y-1 text-soft">
        <span>
          <Link href={rehearsalsPage(slug)} className="rule-link">
            Rehearsal
          </Link>
          {rehearsal.by ? ` by ${rehearsal.by}` : ''}, asked <Time at={rehearsal.askedAt} show="both" />
        </span>
        {rehearsal.incident === null ? null : (
          <span>
            kept on{' '}
            <Link href={incidentUrls(rehearsal.incident).page} className="rule-link">
              incident {rehearsal.incident}
            </Link>
          </span>
        )}
      </p>
      <h1
        aria-live="polite"
        className={cx(
          'mt-2 max-w-3xl text-[1.9rem] leading-[1.12] tracking-tight text-pretty break-words sm:text-[2.4rem]',
          answer === 'splits' && 'text-vermilion',
        )}
      >
        {headline(rehearsal, now)}
      </h1>
      <div className="mt-3 max-w-3xl space-y-1.5">
        {detail ? <p className="text-lg text-soft">{detail}</p> : null}
        {verdict && state === 'failed' ? <Outcome ok={false}>{verdict}</Outcome> : null}
        <TakenAway exclude={rehearsal.exclude} />
        {floor ? (
          <p>
            <span className="text-soft">Held against: </span>
            {formatReading(floor.lambda2)}, {floor.because}
          </p>
        ) : answer !== null ? (
          <p className="text-soft">No floor is set, so only a split would have been a no.</p>
        ) : null}
        {rehearsal.note ? (
          <p className="break-words whitespace-pre-line">
            <span className="text-soft">Note: </span>
            {rehearsal.note}
          </p>
        ) : null}
      </div>
      {isOpen(rehearsal) ? (
        <div className="mt-4">
          <Progress rehearsal={rehearsal} />
        </div>
      ) : null}
    </header>
  )
}

function TakenAway({ exclude }: { exclude: RehearsalDto['exclude'] }) {
  const { said, names } = excludedInFull(exclude)
  return (
    <p className="break-words">
      <span className="text-soft">Taken away: </span>
      {said}
      {said !== '' && names.length > 0 ? ', and ' : ''}
      {names.map((name, index) => (
        <span key={name}>
          <span className="inline-block max-w-full">
            {name}
            {index < names.length - 1 ? ',' : ''}
          </span>{' '}
        </span>
      ))}
    </p>
  )
}
