'use client'

import { useActionState } from 'react'
import { Button, TextField } from '@/components/ui'
import { PASSWORD_MIN_LENGTH } from '@/lib/data/dto'
import { fieldError, IDLE } from '@/lib/http/form-state'
import { setPasswordAction } from '../../actions'
import { FormOutcome } from '../../form-outcome'

export function SetPasswordForm({ token, email }: { token: string; email: string }) {
  const [state, submit, busy] = useActionState(setPasswordAction, IDLE)
  return (
    <form action={submit} className="space-y-5" noValidate>
      <input type="hidden" name="token" value={token} />
      {/* Password managers file the password under this. */}
      <input type="hidden" name="email" autoComplete="username" value={email} />
      <FormOutcome state={state} />
      <TextField
        label="New password"
        hint={`At least ${PASSWORD_MIN_LENGTH} characters; several words are easier to remember than signs.`}
        name="password"
        type="password"
        autoComplete="new-password"
        required
        error={fieldError(state, 'password')}
      />
      <TextField
        label="The same again"
        name="passwordAgain"
        type="password"
        autoComplete="new-password"
        required
        error={fieldError(state, 'passwordAgain')}
      />
      <Button kind="main" type="submit" busy={busy} busyLabel="Setting the password…">
        Set the password and sign in
      </Button>
    </form>
  )
}
