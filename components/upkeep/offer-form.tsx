'use client'

import { useActionState } from 'react'
import { useNodes } from '@/components/live/hooks'
import { Button, Outcome, SelectField } from '@/components/ui'
import type { UpgradeOfferDto, Upgrades } from '@/lib/data/dto'
import { labelChoices } from '@/lib/face/node-columns'
import { type FormState, fieldError, fieldValue, IDLE } from '@/lib/http/form-state'
import type { OfferAction } from './types'

export interface OfferFormProps {
  slug: string
  upgrades: Upgrades
  offer: OfferAction
  onDone: () => void
}

/** Not the first choice: nobody should offer a version to all by leaving a form as it is. */
const EVERY_AGENT = { value: '*', label: 'every agent' }

/** A version to a label, or to all. Nothing to fill in where the server holds no version. */
export function OfferForm({ slug, upgrades, offer, onDone }: OfferFormProps) {
  const nodes = useNodes(slug)
  const [state, submit, busy] = useActionState<FormState<UpgradeOfferDto>, FormData>(
    async (previous, form) => {
      const next = await offer(previous, form)
      if (next.status === 'done') onDone()
      return next
    },
    IDLE,
  )
  if (upgrades.releases.length === 0) return null
  const versions = upgrades.releases.map(({ version, current }) => ({
    value: version,
    label: current ? `${version} (current)` : version,
  }))
  const labels = labelChoices(nodes.data ?? []).map((pair) => ({ value: pair, label: pair }))
  return (
    <form action={submit} className="space-y-4 border-t border-hairline pt-5">
      <div>
        <h3 className="text-base">Offer a version</h3>
        <p className="mt-1 max-w-2xl text-soft">
          Agents that take upgrades download it from this server, compare its fingerprint with the one the
          overlay signed, and start again. Begin with one place; go on when its agents are heard as before.
        </p>
      </div>
      <input type="hidden" name="slug" value={slug} />
      <div className="flex flex-wrap gap-4">
        <SelectField
          label="Version"
          name="version"
          options={versions}
          defaultValue={fieldValue(state, 'version')}
          error={fieldError(state, 'version')}
          className="min-w-44"
        />
        <SelectField
          label="To"
          name="label"
          options={[{ value: '', label: 'choose…' }, ...labels, EVERY_AGENT]}
          defaultValue={fieldValue(state, 'label')}
          error={fieldError(state, 'label')}
          className="min-w-56"
        />
      </div>
      {state.status === 'failed' ? <Outcome ok={false}>{state.problem.detail}</Outcome> : null}
      {state.status === 'done' ? (
        <Outcome ok>It is offered. The table above counts who has taken it.</Outcome>
      ) : null}
      <Button type="submit" busy={busy} busyLabel="Offering…">
        Offer it
      </Button>
    </form>
  )
}
