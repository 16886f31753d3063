'use client'

import { useState } from 'react'
import { Button, Field, inputClass, Outcome, SelectField } from '@/components/ui'
import type { Incident, IncidentWhole } from '@/lib/data/warn-dto'
import { type FormState, fieldError, submit } from '@/lib/http/form-state'
import { ActDialog } from './act-dialog'
import type { IncidentAction } from './types'

interface Props {
  incident: IncidentWhole
  act: IncidentAction
  onDone: () => void
}

export function HandOverDialog({ incident, act, onDone }: Props) {
  const people = incident.people.filter(({ id }) => id !== incident.holder?.id)
  return (
    <ActDialog
      number={incident.number}
      label="Hand over"
      title="Hand it over"
      description="Whoever gets it is told at once, and so are those who were told before. Choose yourself to take it over."
      confirmLabel="Hand it over"
      act={act}
      onDone={onDone}
    >
      {(state) => (
        <SelectField
          label="To"
          name="userId"
          required
          defaultValue=""
          options={[
            { value: '', label: people.length > 0 ? 'Choose…' : 'Nobody else may have it' },
            ...people.map(({ id, name }) => ({ value: id, label: name })),
          ]}
          error={fieldError(state, 'userId')}
        />
      )}
    </ActDialog>
  )
}

const MUTE_CHOICES = [
  { value: '30', label: '30 minutes' },
  { value: '60', label: '1 hour' },
  { value: '240', label: '4 hours' },
  { value: '720', label: '12 hours' },
  { value: '1440', label: '1 day' },
  { value: '4320', label: '3 days' },
]

export function MuteDialog({ incident, act, onDone }: Props) {
  return (
    <ActDialog
      number={incident.number}
      label="Mute"
      title="Mute it for a time"
      description="Nobody is told of this incident until then, whatever happens in it. What happens goes on being recorded."
      confirmLabel="Mute it"
      act={act}
      onDone={onDone}
    >
      {(state) => (
        <>
          <SelectField
            label="For"
            name="minutes"
            defaultValue="60"
            options={MUTE_CHOICES}
            error={fieldError(state, 'minutes')}
          />
          <Words state={state} name="because" label="Why" />
        </>
      )}
    </ActDialog>
  )
}

export function UnmuteButton({ incident, act, onDone }: Props) {
  const [busy, setBusy] = useState(false)
  const [failed, setFailed] = useState<string | null>(null)
  return (
    <>
      <Button
        busy={busy}
        onClick={async () => {
          setBusy(true)
          const state = await submit(act, { number: String(incident.number) }).catch(() => null)
          setBusy(false)
          setFailed(state?.status === 'failed' ? state.problem.detail : state ? null : 'Try again.')
          onDone()
        }}
      >
        End the muting
      </Button>
      {failed ? <Outcome ok={false}>{failed}</Outcome> : null}
    </>
  )
}

export function ResolveDialog({ incident, act, onDone }: Props) {
  return (
    <ActDialog
      number={incident.number}
      label="Resolve"
      kind="main"
      title="Resolve it"
      description="It has cleared. A sentence on what it was helps whoever meets the next one."
      confirmLabel="Resolve it"
      act={act}
      onDone={onDone}
    >
      {(state) => <Words state={state} name="word" label="What was it?" />}
    </ActDialog>
  )
}

export function ReopenDialog({ incident, act, onDone }: Props) {
  return (
    <ActDialog
      number={incident.number}
      label="Reopen"
      title="Reopen it"
      description="What is raised next in this overlay joins it again, and those who were told hear of it."
      confirmLabel="Reopen it"
      act={act}
      onDone={onDone}
    >
      {(state) => <Words state={state} name="because" label="Why" />}
    </ActDialog>
  )
}

function Words({ state, name, label }: { state: FormState<Incident>; name: string; label: string }) {
  return (
    <Field label={label} error={fieldError(state, name)}>
      {(control) => (
        <textarea {...control} name={name} rows={3} maxLength={500} required className={inputClass} />
      )}
    </Field>
  )
}
