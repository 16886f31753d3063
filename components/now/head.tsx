'use client'

import { useEffect } from 'react'
import { Freshness } from '@/components/live/freshness'
import { useOverlay, useReading } from '@/components/live/hooks'
import { FailedState, LinkButton, Note, useNow, Waiting } from '@/components/ui'
import { roleReaches } from '@/lib/auth/permissions'
import type { Overlay, Reading } from '@/lib/data/dto'
import { cx } from '@/lib/face/cx'
import { staleAfterMs } from '@/lib/face/expect'
import { settlingText } from '@/lib/face/settling'
import { formatDuration } from '@/lib/face/time'
import { Contacts } from './contacts'
import { FirstReading, FirstSteps } from './first'
import { TitleFigures } from './title-figures'

/** The sentence, what can be done, and the figures; before there are any, how to get there. */
export function NowHead({ slug }: { slug: string }) {
  const overlay = useOverlay(slug)
  const reading = useReading(slug)

  useTitle(overlay.data, reading.data ?? null)

  if (!overlay.data || reading.data === undefined) {
    const error = overlay.error ?? reading.error
    if (!error) return <NowHeadWaiting />
    return (
      <FailedState
        title="The reading could not be loaded."
        onRetry={() => {
          overlay.retry()
          reading.retry()
        }}
      >
        {error.message} The agents go on measuring; this page asks again by itself.
      </FailedState>
    )
  }
  const joined = Math.max(overlay.data.joined, reading.data?.coverage.joined ?? 0)
  if (joined === 0) return <FirstSteps overlay={overlay.data} />
  if (!reading.data || (reading.data.lambda2 === null && reading.data.last === null)) {
    return <FirstReading overlay={overlay.data} reading={reading.data} />
  }
  return (
    <>
      <Freshness of={reading} />
      <StandstillNote reading={reading.data} overlay={overlay.data} />
      <div className="grid gap-x-12 gap-y-6 lg:grid-cols-[minmax(0,1fr)_minmax(20rem,27rem)]">
        <Verdict reading={reading.data} overlay={overlay.data} />
        <TitleFigures reading={reading.data} />
      </div>
    </>
  )
}

/** Tabs tell their overlays apart, and which of them needs looking at. */
function useTitle(overlay: Overlay | undefined, reading: Reading | null) {
  const state = reading?.treatAsSplit
    ? 'treat as split'
    : reading?.data === 'unheard'
      ? 'unheard'
      : reading?.level
  const title = overlay ? `${overlay.name}${state ? `: ${state}` : ''} – Thinspan` : null
  useEffect(() => {
    if (title) document.title = title
  }, [title])
}

export function NowHeadWaiting() {
  return <Waiting label="Loading the reading" className="h-[46rem] sm:h-[34rem] lg:h-80" />
}

function Verdict({ reading, overlay }: { reading: Reading; overlay: Overlay }) {
  const grave = reading.level === 'split' || reading.treatAsSplit || reading.data === 'unheard'
  return (
    <div>
      <h1
        aria-live="polite"
        className={cx(
          'max-w-3xl text-pretty text-[2rem] leading-[1.1] tracking-tight break-words sm:text-[2.6rem]',
          grave && 'text-vermilion',
        )}
      >
        {reading.verdict}
      </h1>
      {reading.detail ? <p className="mt-4 max-w-2xl text-lg text-soft">{reading.detail}</p> : null}
      {reading.data === 'settling' && reading.lambda2 !== null ? (
        <Note className="mt-4 max-w-2xl">
          {settlingText(reading.settlesInMs)}{' '}
          {reading.level === null
            ? 'Then the first level follows.'
            : 'The overlay has just changed, or another cut may be becoming the weakest. The level shown is that of the last settled reading.'}
        </Note>
      ) : null}
      <Actions overlay={overlay} urgent={grave || reading.level === 'weak'} />
      <Contacts overlay={overlay} />
    </div>
  )
}

function Actions({ overlay, urgent }: { overlay: Overlay; urgent: boolean }) {
  const base = `/overlays/${overlay.slug}`
  return (
    <div className="mt-5 flex flex-wrap gap-2.5">
      {overlay.runbookUrl ? (
        <LinkButton
          kind={urgent ? 'main' : 'plain'}
          href={overlay.runbookUrl}
          target="_blank"
          rel="noreferrer"
        >
          Open the runbook
        </LinkButton>
      ) : null}
      <LinkButton kind={urgent && !overlay.runbookUrl ? 'main' : 'plain'} href={`${base}/nodes`}>
        Look at the nodes
      </LinkButton>
      {roleReaches(overlay.role, 'operator') ? (
        <LinkButton kind="plain" href={`${base}/joining`}>
          Add agents
        </LinkButton>
      ) : null}
    </div>
  )
}

/** A reading that does not move on is not a calm one. */
function StandstillNote({ reading, overlay }: { reading: Reading; overlay: Overlay }) {
  const now = useNow()
  if (now === null || now - Date.parse(reading.at) < staleAfterMs(overlay.pace)) return null
  return (
    <p role="alert" className="mb-5 border-2 border-ink bg-sheet px-4 py-2.5">
      <strong>No new reading for {formatDuration((now - Date.parse(reading.at)) / 1000)}.</strong> What is
      shown is the last known state, not the present one. Check that the collector runs and reaches its
      database.
    </p>
  )
}
