'use client'

import { useActionState, useState } from 'react'
import { Button, ChoiceField, LinkButton, Outcome, SelectField, TextField } from '@/components/ui'
import type { Overlay } from '@/lib/data/dto'
import { DISCLOSURE_CHOICES, PACE_CHOICES, WEIGHT_CHOICES } from '@/lib/face/overlay-choices'
import { slugOf } from '@/lib/face/slug'
import { type FormState, fieldError, fieldValue, IDLE } from '@/lib/http/form-state'
import { DisclosureFold } from './disclosure-fold'

export interface NewOverlayFormProps {
  /** Teams in which the reader may create overlays. */
  teams: readonly { slug: string; name: string }[]
  create: (previous: FormState<Overlay>, form: FormData) => Promise<FormState<Overlay>>
}

export function NewOverlayForm({ teams, create }: NewOverlayFormProps) {
  const [state, submit, busy] = useActionState<FormState<Overlay>, FormData>(create, IDLE)
  const [name, setName] = useState('')
  const [slug, setSlug] = useState<string | null>(null)
  const was = (field: string, first: string) => fieldValue(state, field) ?? first
  const wrong = (field: string) => fieldError(state, field)

  return (
    <form action={submit} className="space-y-7">
      <TextField
        name="name"
        label="Name"
        hint="As people call it: Harbourline."
        required
        maxLength={80}
        value={name}
        onChange={(e) => setName(e.target.value)}
        error={wrong('name')}
      />
      <TextField
        name="slug"
        label="Short name"
        hint="Stands in addresses and commands. Lower-case letters, digits and hyphens; it cannot be changed later."
        required
        maxLength={40}
        pattern="[a-z0-9]([a-z0-9\-]{0,38}[a-z0-9])?"
        spellCheck={false}
        autoCapitalize="none"
        value={slug ?? slugOf(name)}
        onChange={(e) => setSlug(e.target.value)}
        error={wrong('slug')}
      />
      {teams.length > 1 ? (
        <SelectField
          name="team"
          label="Team"
          hint="Its members see the overlay, as their roles allow."
          options={teams.map((t) => ({ value: t.slug, label: t.name }))}
          defaultValue={was('team', teams[0]?.slug ?? '')}
          error={wrong('team')}
        />
      ) : null}
      <ChoiceField
        key={`pace-${was('pace', 'steady')}`}
        legend="Pace"
        hint="How quickly agents walk and report. Quicker answers cost more traffic."
        name="pace"
        choices={PACE_CHOICES}
        defaultValue={was('pace', 'steady')}
        error={wrong('pace')}
      />
      <ChoiceField
        key={`disclosure-${was('disclosure', 'sealed')}`}
        legend="Disclosure"
        hint="What agents say about their links. Start sealed when owners do not share their peer lists."
        name="disclosure"
        choices={DISCLOSURE_CHOICES}
        defaultValue={was('disclosure', 'sealed')}
        error={wrong('disclosure')}
      />
      <div className="max-w-xl">
        <DisclosureFold disclosure="both" />
      </div>
      <ChoiceField
        key={`weights-${was('weights', 'delivered')}`}
        legend="Weight of a link"
        name="weights"
        choices={WEIGHT_CHOICES}
        defaultValue={was('weights', 'delivered')}
        error={wrong('weights')}
      />
      <TextField
        name="contact"
        label="Contact"
        hint="Whom to call, shown on the overlay’s first page."
        optional
        maxLength={200}
        defaultValue={was('contact', '')}
        error={wrong('contact')}
      />
      <TextField
        name="runbookUrl"
        label="Runbook"
        hint="Address of what to do when it weakens."
        type="url"
        placeholder="https://"
        optional
        defaultValue={was('runbookUrl', '')}
        error={wrong('runbookUrl')}
      />
      {state.status === 'failed' ? <Outcome ok={false}>{state.problem.detail}</Outcome> : null}
      <div className="flex flex-wrap gap-2">
        <Button type="submit" kind="main" busy={busy} busyLabel="Creating…">
          Create the overlay
        </Button>
        <LinkButton kind="quiet" href="/overlays">
          Cancel
        </LinkButton>
      </div>
    </form>
  )
}
