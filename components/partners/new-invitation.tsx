'use client'

import { FormDialog } from '@/components/telling/form-dialog'
import { TextField } from '@/components/ui'
import { type CreatedInvitation, INVITATION_MOST_HOURS } from '@/lib/data/partner-dto'
import { fieldError, fieldValue } from '@/lib/http/form-state'
import type { PartnerActions } from './types'

export interface NewInvitationProps {
  slug: string
  invite: PartnerActions['invite']
  onCreated: (invitation: CreatedInvitation) => void
}

export function NewInvitation({ slug, invite, onCreated }: NewInvitationProps) {
  return (
    <FormDialog
      label="Invite a team"
      kind="main"
      title="Invite a team"
      action={invite}
      submitLabel="Create the invitation"
      onDone={onCreated}
    >
      {(state) => (
        <>
          <input type="hidden" name="slug" value={slug} />
          <p className="text-soft">
            Whoever has the code and owns a team here can take part with it: add agents, see the reading and
            the counts on either side of the weak cut. Your nodes’ names and labels stay with your team.
          </p>
          <TextField
            name="expiresInHours"
            label="Hours"
            hint="How long it stays open."
            type="number"
            inputMode="decimal"
            min={0.25}
            max={INVITATION_MOST_HOURS}
            step="any"
            required
            defaultValue={fieldValue(state, 'expiresInHours') ?? '72'}
            error={fieldError(state, 'expiresInHours')}
          />
        </>
      )}
    </FormDialog>
  )
}
