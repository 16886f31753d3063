'use client'

import Link from 'next/link'
import { useState } from 'react'
import { Button, buttonClass, LinkButton, Outcome, Time, useNow } from '@/components/ui'
import type { IncidentWhole } from '@/lib/data/warn-dto'
import { holderWords, isMuted } from '@/lib/face/incidents'
import { rehearseHref } from '@/lib/face/rehearsal'
import { incidentUrls } from '@/lib/face/urls'
import { submit } from '@/lib/http/form-state'
import { HandOverDialog, MuteDialog, ReopenDialog, ResolveDialog, UnmuteButton } from './act-dialogs'
import { SeverityMark } from './marks'
import type { IncidentAction, IncidentActions } from './types'

export interface HeadProps {
  incident: IncidentWhole
  may: boolean
  actions: IncidentActions
  onDone: () => void
}

/** Whoever is woken by it sees the sentence and the button without scrolling. */
export function IncidentHead({ incident, may, actions, onDone }: HeadProps) {
  const now = useNow()
  const { number, overlay, severity, sentence, state, heldSince, holder, raised } = incident
  return (
    <header>
      <p className="flex flex-wrap items-center gap-x-4 gap-y-1 text-soft">
        <span>
          Incident <span className="font-figures">{number}</span> of{' '}
          <Link
            href={`/overlays/${encodeURIComponent(overlay.slug)}`}
            className="underline underline-offset-4"
          >
            {overlay.name}
          </Link>
        </span>
        <SeverityMark severity={severity} />
        <span>
          raised <Time at={incident.raisedAt} show="both" />
        </span>
      </p>
      <h1 className="mt-2 max-w-3xl text-[1.75rem] leading-[1.12] tracking-tight text-pretty break-words sm:text-[2.4rem]">
        {sentence}
      </h1>
      <p aria-live="polite" className="mt-3 text-lg">
        <strong>{holderWords({ state, holder })}</strong>
        {heldSince && holder && state !== 'resolved' ? (
          <span className="text-soft">
            {' '}
            Since <Time at={heldSince} show="both" />.
          </span>
        ) : null}
      </p>
      {may && state === 'open' ? <TakeButton number={number} take={actions.take} onDone={onDone} /> : null}
      <Facts incident={incident} muted={now !== null && isMuted(incident, now)} raised={raised} />
      <div className="mt-4 flex flex-wrap gap-2">
        {may ? (
          <Acts {...{ incident, may, actions, onDone }} muted={now !== null && isMuted(incident, now)} />
        ) : null}
        {may && state !== 'resolved' ? (
          <LinkButton href={rehearseHref(overlay.slug, { incident: number })}>
            Rehearse what to take away
          </LinkButton>
        ) : null}
        <ReportLink number={number} />
      </div>
    </header>
  )
}

function TakeButton({ number, take, onDone }: { number: number; take: IncidentAction; onDone: () => void }) {
  const [busy, setBusy] = useState(false)
  const [failed, setFailed] = useState<string | null>(null)
  async function press() {
    setBusy(true)
    const state = await submit(take, { number: String(number) }).catch(() => null)
    setBusy(false)
    setFailed(
      state === null
        ? 'The server could not be reached. Try again.'
        : state.status === 'failed'
          ? state.problem.detail
          : null,
    )
    onDone()
  }
  return (
    <div className="mt-4 space-y-3">
      <Button
        kind="main"
        busy={busy}
        busyLabel="One moment…"
        onClick={press}
        className="min-h-16 w-full px-8 text-xl sm:w-auto sm:min-w-72"
      >
        I have it
      </Button>
      {failed ? <Outcome ok={false}>{failed}</Outcome> : null}
    </div>
  )
}

function Facts({ incident, muted, raised }: { incident: IncidentWhole; muted: boolean; raised: string[] }) {
  const { clearedAt, resolvedAt, mutedUntil, mutedBecause, inMaintenance } = incident
  return (
    <ul className="mt-4 space-y-1 text-soft">
      {raised.length > 0 ? <li>Raised in it now: {raised.join('; ')}.</li> : null}
      {clearedAt ? (
        <li>
          Cleared <Time at={clearedAt} show="both" />.
        </li>
      ) : null}
      {resolvedAt ? (
        <li>
          Resolved <Time at={resolvedAt} show="both" />.
        </li>
      ) : null}
      {muted && mutedUntil ? (
        <li className="font-semibold text-ink">
          Muted until <Time at={mutedUntil} show="both" />
          {mutedBecause ? `: ${mutedBecause}` : ''}. Nobody is told until then.
        </li>
      ) : null}
      {inMaintenance ? <li>It was raised in a maintenance window: recorded, and nobody was woken.</li> : null}
    </ul>
  )
}

function Acts({ incident, actions, onDone, muted }: HeadProps & { muted: boolean }) {
  if (incident.state === 'resolved')
    return <ReopenDialog incident={incident} act={actions.reopen} onDone={onDone} />
  return (
    <>
      {incident.state === 'cleared' ? (
        <ResolveDialog incident={incident} act={actions.resolve} onDone={onDone} />
      ) : null}
      <HandOverDialog incident={incident} act={actions.handOver} onDone={onDone} />
      {muted ? (
        <UnmuteButton incident={incident} act={actions.unmute} onDone={onDone} />
      ) : (
        <MuteDialog incident={incident} act={actions.mute} onDone={onDone} />
      )}
    </>
  )
}

function ReportLink({ number }: { number: number }) {
  const now = useNow()
  // The reader's zone is known in the browser only.
  const zone = now === null ? null : Intl.DateTimeFormat().resolvedOptions().timeZone
  return (
    <a href={incidentUrls(number).report(zone)} className={buttonClass('plain')} download>
      Report as PDF
    </a>
  )
}
