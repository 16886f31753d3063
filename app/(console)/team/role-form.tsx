'use client'

import { useActionState } from 'react'
import { Button, inputClass } from '@/components/ui'
import { type Member, ROLES } from '@/lib/data/dto'
import { IDLE } from '@/lib/http/form-state'
import { changeRoleAction } from './actions'
import { ROLE_WORDS } from './roles'

export function RoleForm({ member }: { member: Member }) {
  const [state, submit, busy] = useActionState(changeRoleAction, IDLE)
  if (member.lastOwner)
    return (
      <span className="text-sm text-soft">
        The only owner who can sign in: make someone else an owner first.
      </span>
    )
  return (
    <form action={submit} className="flex flex-wrap items-center gap-2">
      <input type="hidden" name="memberId" value={member.id} />
      <select
        name="role"
        defaultValue={member.role}
        aria-label={`Role of ${member.name}`}
        className={`${inputClass} max-w-36`}
      >
        {ROLES.map((role) => (
          <option key={role} value={role}>
            {ROLE_WORDS[role].label}
          </option>
        ))}
      </select>
      <Button type="submit" busy={busy} busyLabel="Saving…" aria-label={`Save the role of ${member.name}`}>
        Save
      </Button>
      {state.status === 'failed' ? (
        <p role="alert" className="w-full text-sm font-semibold">
          {state.problem.detail}
        </p>
      ) : null}
    </form>
  )
}
