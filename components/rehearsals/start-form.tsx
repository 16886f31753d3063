'use client'

import { useRouter } from 'next/navigation'
import { useMemo, useState } from 'react'
import { useOpenIncidents } from '@/components/live/hooks'
import { Button, Outcome, SelectField, Sheet, TextField, Time, useNow } from '@/components/ui'
import type { Excluded, RehearsalDto } from '@/lib/data/rehearsal-dto'
import type { MaintenanceWindowDto } from '@/lib/data/rules-dto'
import {
  askedOf,
  type ChooseFrom,
  choiceSentence,
  chosenOf,
  type Draft,
  isNothing,
  rehearsalPage,
  soonWindows,
  whenOptions,
} from '@/lib/face/rehearsal'
import { Chooser } from './chooser'
import { ChosenChips } from './chosen-chips'
import type { RehearsalActions } from './types'
import { useAct } from './use-act'

const NOTE_MOST = 300
const MINUTE_MS = 60_000

export interface StartFormProps {
  slug: string
  from: ChooseFrom
  windows: readonly MaintenanceWindowDto[]
  initial: Draft
  /** A maintenance window that was asked for. */
  window: string | null
  start: RehearsalActions['start']
  onStarted: () => void
}

/** What is to be away, said in one sentence before it begins. */
export function StartForm({ slug, from, windows, initial, window, start, onStarted }: StartFormProps) {
  const [draft, setDraft] = useState(initial)
  const [planned, setPlanned] = useState<RehearsalDto | null>(null)
  const now = useNow() ?? 0
  const minuteMs = Math.floor(now / MINUTE_MS) * MINUTE_MS
  const soon = useMemo(
    () => (minuteMs === 0 ? [] : soonWindows(windows, from.nodes, minuteMs, window)),
    [windows, from.nodes, minuteMs, window],
  )
  const change = (how: (exclude: Excluded) => Excluded) => {
    setPlanned(null)
    setDraft((was) => ({ ...was, exclude: how(was.exclude) }))
  }
  return (
    <Sheet heading="What is taken away" aside="in rehearsal only: real traffic is untouched">
      <div className="grid gap-x-10 gap-y-6 lg:grid-cols-[minmax(0,1fr)_minmax(20rem,26rem)] lg:items-start">
        <Chooser
          slug={slug}
          from={from}
          windows={soon}
          exclude={draft.exclude}
          onChange={change}
          onWindows={(how, reason) => {
            change(how)
            setDraft((was) => ({ ...was, note: was.note === '' ? reason : was.note }))
          }}
        />
        <Summary
          {...{ slug, from, draft, setDraft, change, start }}
          options={whenOptions(soon, minuteMs)}
          asked={askedOf(draft, soon, now)}
          planned={planned}
          onStarted={(rehearsal) => {
            if (rehearsal.startsAt !== null) setPlanned(rehearsal)
            onStarted()
          }}
        />
      </div>
    </Sheet>
  )
}

function Summary(props: {
  slug: string
  from: ChooseFrom
  draft: Draft
  setDraft: (draft: Draft) => void
  change: (how: (exclude: Excluded) => Excluded) => void
  options: { value: string; label: string }[]
  asked: ReturnType<typeof askedOf>
  planned: RehearsalDto | null
  start: RehearsalActions['start']
  onStarted: (rehearsal: RehearsalDto) => void
}) {
  const { slug, from, draft, setDraft, change, options, asked, planned } = props
  const router = useRouter()
  const incidents = useOpenIncidents(slug)
  const chosen = useMemo(() => chosenOf(draft.exclude, from), [draft.exclude, from])
  const { busy, failed, run } = useAct(props.start, (rehearsal) => {
    props.onStarted(rehearsal)
    if (rehearsal.startsAt === null) router.push(rehearsalPage(slug, rehearsal.id))
  })
  const nothing = isNothing(draft.exclude)
  const problem = nothing ? null : (chosen.problems[0] ?? ('missing' in asked ? asked.missing : null))
  const known = [
    ...(incidents.data ?? []).map(({ number, sentence }) => ({ number, sentence })),
    ...(draft.incident !== null && !incidents.data?.some(({ number }) => number === draft.incident)
      ? [{ number: draft.incident, sentence: '' }]
      : []),
  ]
  return (
    <form
      className="space-y-4 border border-ink bg-paper p-4 lg:sticky lg:top-6"
      onSubmit={(event) => {
        event.preventDefault()
        if ('asked' in asked) void run({ slug, rehearsal: JSON.stringify(asked.asked) })
      }}
    >
      <p aria-live="polite" className="text-lg leading-snug font-semibold break-words">
        {choiceSentence(draft.exclude, chosen)}
      </p>
      <ChosenChips exclude={draft.exclude} onChange={change} />
      <SelectField
        label="Begin"
        options={options}
        value={draft.when}
        onChange={(event) => setDraft({ ...draft, when: event.target.value })}
      />
      {draft.when === 'at' ? (
        <TextField
          label="Day and time"
          type="datetime-local"
          value={draft.at}
          onChange={(event) => setDraft({ ...draft, at: event.target.value })}
        />
      ) : null}
      {known.length > 0 ? (
        <SelectField
          label="Keep it on"
          optional
          options={[
            { value: '', label: 'no incident' },
            ...known.map(({ number, sentence }) => ({
              value: String(number),
              label: `incident ${number}${sentence ? `: ${sentence}` : ''}`,
            })),
          ]}
          value={draft.incident === null ? '' : String(draft.incident)}
          onChange={(event) =>
            setDraft({ ...draft, incident: event.target.value === '' ? null : Number(event.target.value) })
          }
        />
      ) : null}
      <TextField
        label="Note"
        optional
        maxLength={NOTE_MOST}
        value={draft.note}
        onChange={(event) => setDraft({ ...draft, note: event.target.value })}
      />
      {problem ? <Outcome ok={false}>{problem}</Outcome> : null}
      {failed ? <Outcome ok={false}>{failed}</Outcome> : null}
      {planned?.startsAt ? (
        <Outcome ok>
          Planned for <Time at={planned.startsAt} show="both" />. It stands in the list below.
        </Outcome>
      ) : null}
      <Button
        type="submit"
        kind="main"
        busy={busy}
        busyLabel="Starting…"
        disabled={nothing || problem !== null}
        className="w-full sm:w-auto"
      >
        {draft.when === 'now' ? 'Rehearse it' : 'Plan the rehearsal'}
      </Button>
    </form>
  )
}
