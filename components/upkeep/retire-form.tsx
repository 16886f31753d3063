'use client'

import { useActionState } from 'react'
import { Button, Outcome, SelectField } from '@/components/ui'
import type { Overlay } from '@/lib/data/dto'
import { retireText } from '@/lib/face/upkeep'
import { type FormState, fieldError, IDLE } from '@/lib/http/form-state'
import type { RetireAfterAction } from './types'

export interface RetireFormProps {
  slug: string
  /** Null for never. */
  hours: number | null
  /** Null for those who may only look. */
  save: RetireAfterAction | null
  onDone: () => void
}

const CHOICES = [null, 6, 24, 72, 168, 720]

export function RetireForm({ slug, hours, save, onDone }: RetireFormProps) {
  return (
    <>
      <p className="max-w-3xl text-soft">
        An agent that says goodbye with <code className="font-figures">leave</code> is not counted any more.
        One that falls silent is unheard until somebody retires it on the Nodes page, or by itself after a
        while: then coverage is full again, and nobody is told of a node that is gone on purpose.
      </p>
      {save ? (
        <ChoiceOfHours slug={slug} hours={hours} save={save} onDone={onDone} />
      ) : (
        <p className="mt-3">Agents are retired by themselves: {retireText(hours)}.</p>
      )}
    </>
  )
}

function ChoiceOfHours({ slug, hours, save, onDone }: RetireFormProps & { save: RetireAfterAction }) {
  const [state, submit, busy] = useActionState<FormState<Overlay>, FormData>(async (previous, form) => {
    const next = await save(previous, form)
    if (next.status === 'done') onDone()
    return next
  }, IDLE)
  const choices = CHOICES.includes(hours) ? CHOICES : [...CHOICES, hours]
  return (
    <form action={submit} className="mt-4 flex flex-wrap items-end gap-3">
      <input type="hidden" name="slug" value={slug} />
      <SelectField
        label="Retire agents by themselves"
        name="hours"
        options={choices.map((choice) => ({ value: String(choice ?? ''), label: retireText(choice) }))}
        defaultValue={String(hours ?? '')}
        error={fieldError(state, 'hours')}
        className="min-w-60"
      />
      <Button type="submit" busy={busy} busyLabel="Saving…">
        Save
      </Button>
      {state.status === 'failed' ? <Outcome ok={false}>{state.problem.detail}</Outcome> : null}
      {state.status === 'done' ? <Outcome ok>Saved.</Outcome> : null}
    </form>
  )
}
