'use client'

import { useActionState } from 'react'
import { FormOutcome } from '@/app/(auth)/form-outcome'
import { Button, ChoiceField, Outcome, TextField } from '@/components/ui'
import type { SetPasswordLink } from '@/lib/data'
import { ROLES } from '@/lib/data/dto'
import { fieldError, fieldValue, IDLE } from '@/lib/http/form-state'
import { addMemberAction } from './actions'
import { PasswordLinkBlock } from './password-link-block'
import { ROLE_WORDS } from './roles'

const CHOICES = [...ROLES].reverse().map((role) => ({ value: role, ...ROLE_WORDS[role] }))

export function AddMemberForm({ team }: { team: string }) {
  const [state, submit, busy] = useActionState(addMemberAction, IDLE)
  return (
    <div className="space-y-5">
      {state.status === 'done' ? <Added {...state.value} /> : null}
      <form action={submit} className="space-y-5" noValidate>
        <input type="hidden" name="team" value={team} />
        <FormOutcome state={state} />
        <TextField
          label="Name"
          name="name"
          autoComplete="off"
          required
          defaultValue={fieldValue(state, 'name')}
          error={fieldError(state, 'name')}
        />
        <TextField
          label="E-mail address"
          hint="Nothing is sent: for someone new here you will get a link to pass on."
          name="email"
          type="email"
          autoComplete="off"
          required
          defaultValue={fieldValue(state, 'email')}
          error={fieldError(state, 'email')}
        />
        <ChoiceField
          key={fieldValue(state, 'role')}
          legend="Role"
          name="role"
          choices={CHOICES}
          defaultValue={fieldValue(state, 'role')}
          required
          error={fieldError(state, 'role') ? 'Choose a role.' : null}
        />
        <Button kind="main" type="submit" busy={busy} busyLabel="Adding…">
          Add to the team
        </Button>
      </form>
    </div>
  )
}

function Added({ name, email, active, url, expiresAt }: SetPasswordLink) {
  if (url === null || expiresAt === null)
    return (
      <Outcome ok>
        {active
          ? `${name} is in the team and signs in as ${email} with the password already in use.`
          : `${name} is in the team, but has not set a password yet: that takes the link from the team that added ${email} first. Until then whoever holds that link can get in here too.`}
      </Outcome>
    )
  return <PasswordLinkBlock name={name} url={url} expiresAt={expiresAt} />
}
