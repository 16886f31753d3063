'use client'

import { useActionState } from 'react'
import { Button } from '@/components/ui'
import { IDLE } from '@/lib/http/form-state'
import { signOutAction } from '../actions'

export function SignOutForm() {
  const [state, submit, busy] = useActionState(signOutAction, IDLE)
  return (
    <form action={submit}>
      <Button kind="quiet" type="submit" busy={busy} busyLabel="Signing out…" className="-ml-2">
        Sign out
      </Button>
      {state.status === 'failed' ? <p role="alert">{state.problem.detail}</p> : null}
    </form>
  )
}
