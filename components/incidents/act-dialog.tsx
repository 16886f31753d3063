'use client'

import { type ReactNode, useState } from 'react'
import { Button, type ButtonKind, Dialog, DialogActions } from '@/components/ui'
import type { Incident } from '@/lib/data/warn-dto'
import { type FormState, IDLE } from '@/lib/http/form-state'
import type { IncidentAction } from './types'

export interface ActDialogProps {
  number: number
  label: string
  kind?: ButtonKind
  title: string
  description: string
  confirmLabel: string
  act: IncidentAction
  onDone: () => void
  children: (state: FormState<Incident>) => ReactNode
}

/** A button that asks for a few words first. */
export function ActDialog(props: ActDialogProps) {
  const [open, setOpen] = useState(false)
  const [busy, setBusy] = useState(false)
  const [state, setState] = useState<FormState<Incident>>(IDLE)
  const [unreachable, setUnreachable] = useState(false)

  async function send(form: FormData) {
    setBusy(true)
    setUnreachable(false)
    const next = await props.act(IDLE, form).catch(() => null)
    setBusy(false)
    if (next === null) return setUnreachable(true)
    setState(next)
    if (next.status === 'done') setOpen(false)
    props.onDone()
  }

  const problem = state.status === 'failed' && !state.problem.errors ? state.problem.detail : null
  const failed = unreachable ? 'The server could not be reached. Try again.' : problem
  return (
    <>
      <Button
        kind={props.kind}
        onClick={() => {
          setState(IDLE)
          setUnreachable(false)
          setOpen(true)
        }}
      >
        {props.label}
      </Button>
      <Dialog open={open} onOpenChange={setOpen} title={props.title} description={props.description}>
        <form
          onSubmit={(event) => {
            event.preventDefault()
            void send(new FormData(event.currentTarget))
          }}
          className="space-y-4"
        >
          <input type="hidden" name="number" value={props.number} />
          {props.children(state)}
          {failed ? (
            <p role="alert" className="border-l-4 border-ink pl-2 font-semibold">
              {failed}
            </p>
          ) : null}
          <DialogActions closeLabel="Leave it as it is">
            <Button type="submit" kind="main" busy={busy}>
              {props.confirmLabel}
            </Button>
          </DialogActions>
        </form>
      </Dialog>
    </>
  )
}
