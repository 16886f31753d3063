'use client'

import { useActionState } from 'react'
import { Button, Note, TextField } from '@/components/ui'
import { fieldError, fieldValue, IDLE } from '@/lib/http/form-state'
import { signInAction } from '../actions'
import { FormOutcome } from '../form-outcome'

export function SignInForm({ next }: { next?: string }) {
  const [state, submit, busy] = useActionState(signInAction, IDLE)
  return (
    <form action={submit} className="space-y-5" noValidate>
      {next ? <input type="hidden" name="next" value={next} /> : null}
      <FormOutcome state={state} />
      <TextField
        label="E-mail address"
        name="email"
        type="email"
        autoComplete="username"
        required
        defaultValue={fieldValue(state, 'email')}
        error={fieldError(state, 'email')}
      />
      <TextField
        label="Password"
        name="password"
        type="password"
        autoComplete="current-password"
        required
        error={fieldError(state, 'password')}
      />
      <Button kind="main" type="submit" busy={busy} busyLabel="Signing in…">
        Sign in
      </Button>
      <Note>No password yet, or forgotten? An owner of your team can give you a link to set one.</Note>
    </form>
  )
}
