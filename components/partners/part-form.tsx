'use client'

import { useActionState } from 'react'
import { Button, Outcome, TextField } from '@/components/ui'
import type { OverlayTeam, Partners } from '@/lib/data/partner-dto'
import { type FormState, fieldError, fieldValue, IDLE } from '@/lib/http/form-state'
import type { PartnerActions } from './types'

export interface PartFormProps {
  slug: string
  mine: OverlayTeam
  /** Keys of labels that the team's nodes have. */
  ownLabels: readonly string[]
  /** Null for those who may only look. */
  change: PartnerActions['change'] | null
  onDone: () => void
}

export function PartForm({ slug, mine, ownLabels, change, onDone }: PartFormProps) {
  if (!change)
    return (
      <dl className="max-w-2xl space-y-1">
        <div>
          <dt className="inline text-soft">Contact: </dt>
          <dd className="inline">{mine.contact ?? 'none given'}</dd>
        </div>
        <div>
          <dt className="inline text-soft">Labels shown to the other teams: </dt>
          <dd className="inline">{mine.sharedLabels.join(', ') || 'none'}</dd>
        </div>
      </dl>
    )
  return <Change {...{ slug, mine, ownLabels, change, onDone }} />
}

function Change({
  slug,
  mine,
  ownLabels,
  change,
  onDone,
}: PartFormProps & { change: PartnerActions['change'] }) {
  const [state, submit, busy] = useActionState<FormState<Partners>, FormData>(async (previous, form) => {
    const next = await change(previous, form)
    if (next.status === 'done') onDone()
    return next
  }, IDLE)
  const keys = [...new Set([...ownLabels, ...mine.sharedLabels])].sort()
  return (
    <form action={submit} className="space-y-5">
      <input type="hidden" name="slug" value={slug} />
      <TextField
        name="contact"
        label="Contact"
        hint="Whom the other teams call about this overlay. It stands on everybody’s first page."
        optional
        maxLength={200}
        defaultValue={fieldValue(state, 'contact') ?? mine.contact ?? ''}
        error={fieldError(state, 'contact')}
      />
      <fieldset className="max-w-xl">
        <legend className="mb-1 font-semibold">Labels the other teams may see</legend>
        <p className="mb-1.5 text-sm text-soft">
          What is ticked they see of each of your nodes, beside the name they have for it. Once every team
          shows a label, the page can say that the weak cut follows it.
        </p>
        {keys.length === 0 ? (
          <p className="text-soft">Your nodes have no labels yet.</p>
        ) : (
          <div className="border border-edge bg-sheet">
            {keys.map((key) => (
              <label key={key} className="flex gap-3 border-b border-hairline px-3 py-2.5 last:border-b-0">
                <input
                  type="checkbox"
                  name={`label:${key}`}
                  defaultChecked={mine.sharedLabels.includes(key)}
                  className="mt-1 size-4 shrink-0 accent-(--ink)"
                />
                {key}
              </label>
            ))}
          </div>
        )}
      </fieldset>
      {state.status === 'failed' ? <Outcome ok={false}>{state.problem.detail}</Outcome> : null}
      {state.status === 'done' ? <Outcome ok>Saved.</Outcome> : null}
      <Button type="submit" kind="main" busy={busy} busyLabel="Saving…">
        Save what is shown
      </Button>
    </form>
  )
}
