'use client'

import { useActionState } from 'react'
import { Button, TextField } from '@/components/ui'
import { PASSWORD_MIN_LENGTH } from '@/lib/data/dto'
import { fieldError, fieldValue, IDLE } from '@/lib/http/form-state'
import { firstRunAction } from '../actions'
import { FormOutcome } from '../form-outcome'

export function FirstRunForm() {
  const [state, submit, busy] = useActionState(firstRunAction, IDLE)
  const field = (name: string) => ({
    name,
    required: true,
    defaultValue: fieldValue(state, name),
    error: fieldError(state, name),
  })
  return (
    <form action={submit} className="space-y-5" noValidate>
      <FormOutcome state={state} />
      <TextField
        label="Team"
        hint="Who runs the overlays: an organisation or a department."
        {...field('team')}
      />
      <TextField label="Your name" autoComplete="name" {...field('name')} />
      <TextField label="Your e-mail address" type="email" autoComplete="username" {...field('email')} />
      <TextField
        label="Password"
        hint={`At least ${PASSWORD_MIN_LENGTH} characters; several words are easier to remember than signs.`}
        type="password"
        autoComplete="new-password"
        {...field('password')}
      />
      <Button kind="main" type="submit" busy={busy} busyLabel="Setting up…">
        Create the owner and sign in
      </Button>
    </form>
  )
}
