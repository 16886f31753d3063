'use client'

import { useActionState, useState } from 'react'
import { Button, Dialog, DialogActions, Outcome, TextField } from '@/components/ui'
import type { CreatedJoiningCode } from '@/lib/data/dto'
import { fieldError, fieldValue, IDLE } from '@/lib/http/form-state'
import type { CreateCode } from './types'

export interface NewCodeProps {
  slug: string
  create: CreateCode
  onCreated: (code: CreatedJoiningCode) => void
}

export function NewCode({ slug, create, onCreated }: NewCodeProps) {
  const [open, setOpen] = useState(false)
  return (
    <>
      <Button kind="main" onClick={() => setOpen(true)}>
        Create a joining code
      </Button>
      <Dialog
        open={open}
        onOpenChange={setOpen}
        title="Create a joining code"
        description="Whoever has the code can add agents to this overlay until it is used up, expires or is revoked."
      >
        <NewCodeForm
          slug={slug}
          create={create}
          onCreated={(code) => {
            setOpen(false)
            onCreated(code)
          }}
        />
      </Dialog>
    </>
  )
}

function NewCodeForm({ slug, create, onCreated }: NewCodeProps) {
  const [state, submit, busy] = useActionState<Awaited<ReturnType<CreateCode>>, FormData>(
    async (previous, form) => {
      const next = await create(previous, form)
      if (next.status === 'done') onCreated(next.value)
      return next
    },
    IDLE,
  )
  return (
    <form action={submit} className="space-y-5">
      <input type="hidden" name="slug" value={slug} />
      <TextField
        name="uses"
        label="Agents"
        hint="How many agents may join with it. One code can serve a whole roll-out."
        type="number"
        inputMode="numeric"
        min={1}
        max={10000}
        step={1}
        required
        defaultValue={fieldValue(state, 'uses') ?? '1'}
        error={fieldError(state, 'uses')}
      />
      <TextField
        name="expiresInHours"
        label="Hours"
        hint="How long it stays open. As short as the work takes."
        type="number"
        inputMode="decimal"
        min={0.25}
        max={2160}
        step="any"
        required
        defaultValue={fieldValue(state, 'expiresInHours') ?? '24'}
        error={fieldError(state, 'expiresInHours')}
      />
      {state.status === 'failed' ? <Outcome ok={false}>{state.problem.detail}</Outcome> : null}
      <DialogActions closeLabel="Cancel">
        <Button type="submit" kind="main" busy={busy} busyLabel="Creating…">
          Create the code
        </Button>
      </DialogActions>
    </form>
  )
}
