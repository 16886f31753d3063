'use client'

import { useActionState, useState } from 'react'
import { Button, Dialog, DialogActions, Outcome, SelectField, TextField } from '@/components/ui'
import { type FormState, fieldError, fieldValue, IDLE } from '@/lib/http/form-state'

type Joined = { slug: string; name: string }

export interface JoinOverlayProps {
  /** Teams that the reader owns. */
  teams: readonly { slug: string; name: string }[]
  join: (previous: FormState<Joined>, form: FormData) => Promise<FormState<Joined>>
}

/** Takes part in another team's overlay, with the code of its invitation. */
export function JoinOverlay(props: JoinOverlayProps) {
  const [open, setOpen] = useState(false)
  return (
    <>
      <Button onClick={() => setOpen(true)}>Join with an invitation</Button>
      <Dialog
        open={open}
        onOpenChange={setOpen}
        title="Join an overlay with an invitation"
        description="Your team shares another team’s overlay: it adds agents of its own, and sees the reading that all of them make."
      >
        <JoinForm {...props} />
      </Dialog>
    </>
  )
}

function JoinForm({ teams, join }: JoinOverlayProps) {
  const [state, submit, busy] = useActionState<FormState<Joined>, FormData>(join, IDLE)
  return (
    <form action={submit} className="space-y-5">
      <TextField
        name="code"
        label="Invitation code"
        hint="From an owner of the team that owns the overlay."
        required
        maxLength={100}
        spellCheck={false}
        autoCapitalize="characters"
        autoComplete="off"
        error={fieldError(state, 'code')}
      />
      {teams.length > 1 ? (
        <SelectField
          name="team"
          label="Team"
          hint="Its members see the overlay, as their roles allow."
          options={teams.map((t) => ({ value: t.slug, label: t.name }))}
          defaultValue={fieldValue(state, 'team') ?? teams[0]?.slug ?? ''}
          error={fieldError(state, 'team')}
        />
      ) : null}
      <TextField
        name="contact"
        label="Contact"
        hint="Whom the other teams call about this overlay."
        optional
        maxLength={200}
        defaultValue={fieldValue(state, 'contact') ?? ''}
        error={fieldError(state, 'contact')}
      />
      {state.status === 'failed' ? <Outcome ok={false}>{state.problem.detail}</Outcome> : null}
      <DialogActions closeLabel="Cancel">
        <Button type="submit" kind="main" busy={busy} busyLabel="Joining…">
          Join the overlay
        </Button>
      </DialogActions>
    </form>
  )
}
