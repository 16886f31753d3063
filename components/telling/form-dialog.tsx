'use client'

import { type FormEvent, type ReactNode, useState } from 'react'
import { Button, type ButtonKind, Dialog, DialogActions, Outcome } from '@/components/ui'
import { type FormState, IDLE } from '@/lib/http/form-state'
import type { Action } from './types'

export interface FormDialogProps<T> {
  label: ReactNode
  kind?: ButtonKind
  title: string
  action: Action<T>
  submitLabel: string
  onDone?: (value: T) => void
  children: (state: FormState<unknown>) => ReactNode
}

/** A form in a dialog, which closes when it is stored. What was typed stays where it was refused. */
export function FormDialog<T>(props: FormDialogProps<T>) {
  const [open, setOpen] = useState(false)
  return (
    <>
      <Button kind={props.kind} onClick={() => setOpen(true)}>
        {props.label}
      </Button>
      <Dialog open={open} onOpenChange={setOpen} title={props.title}>
        <DialogForm {...props} close={() => setOpen(false)} />
      </Dialog>
    </>
  )
}

function DialogForm<T>(props: FormDialogProps<T> & { close: () => void }) {
  const [state, setState] = useState<FormState<T>>(IDLE)
  const [busy, setBusy] = useState(false)
  const [lost, setLost] = useState(false)

  async function send(event: FormEvent<HTMLFormElement>) {
    event.preventDefault()
    setBusy(true)
    const next = await props.action(IDLE, new FormData(event.currentTarget)).catch(() => null)
    setBusy(false)
    setLost(next === null)
    if (next === null) return
    setState(next)
    if (next.status !== 'done') return
    props.onDone?.(next.value)
    props.close()
  }

  return (
    <form onSubmit={send} className="space-y-4" noValidate>
      {props.children(state)}
      {state.status === 'failed' ? <Outcome ok={false}>{state.problem.detail}</Outcome> : null}
      {lost ? <Outcome ok={false}>The server could not be reached. Try again.</Outcome> : null}
      <DialogActions closeLabel="Cancel">
        <Button kind="main" type="submit" busy={busy} busyLabel="Saving…">
          {props.submitLabel}
        </Button>
      </DialogActions>
    </form>
  )
}
