'use client'

import { useRef, useState } from 'react'
import {
  Button,
  EmptyState,
  Field,
  inputClass,
  Mark,
  type MarkShape,
  Outcome,
  Sheet,
  Time,
} from '@/components/ui'
import { NOTE_MOST } from '@/lib/data/incident-dto'
import type { EntryKind, Incident, IncidentWhole } from '@/lib/data/warn-dto'
import { type FormState, fieldError, IDLE } from '@/lib/http/form-state'
import type { IncidentAction } from './types'

/** Full: raised, taken, heard. Dashed: not heard. Short: less. Hollow: over, or a remark. */
const SHAPES: Record<EntryKind, MarkShape> = {
  raised: 'full',
  joined: 'full',
  cleared: 'hollow',
  'cleared-all': 'hollow',
  reading: 'hollow',
  'link-lost': 'short',
  'link-found': 'full',
  'link-weakened': 'short',
  'link-recovered': 'full',
  'warnings-away': 'dashed',
  'agent-unheard': 'dashed',
  'agent-heard': 'full',
  'level-changed': 'hollow',
  told: 'hollow',
  taken: 'full',
  'handed-over': 'full',
  note: 'hollow',
  file: 'hollow',
  muted: 'short',
  unmuted: 'full',
  maintenance: 'short',
  rehearsal: 'hollow',
  resolved: 'hollow',
  reopened: 'full',
}

/** What happened, in the order it did; what people write stands among it. */
export function TimelineSheet(props: {
  incident: IncidentWhole
  /** Null for those who may only look. */
  note: IncidentAction | null
  onDone: () => void
}) {
  const { incident, note, onDone } = props
  return (
    <Sheet heading="What happened" aside={`${incident.entries.length} in all`}>
      {incident.entries.length === 0 ? (
        <EmptyState title="Nothing is entered yet." />
      ) : (
        <ol aria-label="Timeline">
          {incident.entries.map((entry) => (
            <li key={entry.id} className="flex gap-x-3 border-b border-hairline py-2">
              <span className="w-24 shrink-0 font-figures text-sm leading-6 text-soft">
                <Time at={entry.at} show="moment" />
              </span>
              <span className="shrink-0 leading-6">
                <Mark shape={SHAPES[entry.kind]} grave={entry.kind === 'agent-unheard'}>
                  {null}
                </Mark>
              </span>
              <span className="min-w-0 break-words whitespace-pre-line">
                {entry.kind === 'note' && entry.by ? (
                  <span className="block text-sm text-soft">{entry.by.name} noted:</span>
                ) : null}
                {entry.text}
              </span>
            </li>
          ))}
        </ol>
      )}
      {note ? <NoteForm number={incident.number} act={note} onDone={onDone} /> : null}
    </Sheet>
  )
}

function NoteForm({ number, act, onDone }: { number: number; act: IncidentAction; onDone: () => void }) {
  const form = useRef<HTMLFormElement>(null)
  const [busy, setBusy] = useState(false)
  const [state, setState] = useState<FormState<Incident>>(IDLE)
  const [unreachable, setUnreachable] = useState(false)

  async function send(data: FormData) {
    setBusy(true)
    const next = await act(IDLE, data).catch(() => null)
    setBusy(false)
    setUnreachable(next === null)
    if (!next) return
    setState(next)
    if (next.status === 'done') form.current?.reset()
    onDone()
  }

  return (
    <form
      ref={form}
      className="mt-4 space-y-3"
      onSubmit={(event) => {
        event.preventDefault()
        void send(new FormData(event.currentTarget))
      }}
    >
      <input type="hidden" name="number" value={number} />
      <Field
        label="Note"
        hint="Everyone in the team sees it; it stays in the timeline."
        error={fieldError(state, 'text')}
      >
        {(control) => (
          <textarea {...control} name="text" rows={2} maxLength={NOTE_MOST} required className={inputClass} />
        )}
      </Field>
      <Button type="submit" busy={busy} busyLabel="Adding…">
        Add the note
      </Button>
      {unreachable ? <Outcome ok={false}>The server could not be reached. Try again.</Outcome> : null}
      {state.status === 'failed' && !state.problem.errors ? (
        <Outcome ok={false}>{state.problem.detail}</Outcome>
      ) : null}
    </form>
  )
}
