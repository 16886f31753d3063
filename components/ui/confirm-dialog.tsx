'use client'

import { type ReactNode, useState } from 'react'
import { Button, type ButtonKind } from './button'
import { Dialog, DialogActions } from './dialog'

export interface ConfirmDialogProps {
  /** Text of the button that opens it. */
  label: ReactNode
  kind?: ButtonKind
  title: ReactNode
  /** Names what will go, and what will not come back. */
  children: ReactNode
  /** A verb and its object: "Revoke this code". */
  confirmLabel: string
  keepLabel?: string
  disabled?: boolean
  /** Resolves to null when done, or to what went wrong. */
  onConfirm: () => Promise<string | null>
}

export function ConfirmDialog(props: ConfirmDialogProps) {
  const [open, setOpen] = useState(false)
  const [busy, setBusy] = useState(false)
  const [error, setError] = useState<string | null>(null)

  async function confirm() {
    setBusy(true)
    setError(null)
    const failed = await props.onConfirm().catch(() => 'The server could not be reached. Try again.')
    setBusy(false)
    if (failed) setError(failed)
    else setOpen(false)
  }

  return (
    <>
      <Button kind={props.kind} disabled={props.disabled} onClick={() => setOpen(true)}>
        {props.label}
      </Button>
      <Dialog
        open={open}
        onOpenChange={(next) => {
          setError(null)
          setOpen(next)
        }}
        title={props.title}
      >
        <div className="space-y-2">{props.children}</div>
        {error ? (
          <p role="alert" className="mt-4 border-l-4 border-ink pl-2 font-semibold">
            {error}
          </p>
        ) : null}
        <DialogActions closeLabel={props.keepLabel ?? 'Keep it'}>
          <Button kind="grave" busy={busy} onClick={confirm}>
            {props.confirmLabel}
          </Button>
        </DialogActions>
      </Dialog>
    </>
  )
}
