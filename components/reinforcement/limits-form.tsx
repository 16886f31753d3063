'use client'

import { useNodes } from '@/components/live/hooks'
import { Button, Outcome, SelectField, TextField } from '@/components/ui'
import { REINFORCE_LINKS_MOST } from '@/lib/data/reinforcement-dto'
import { labelChoices, labelKeysOf } from '@/lib/face/node-columns'
import { type Limits, NO_LIMITS } from '@/lib/face/reinforcement'

export interface LimitsFormProps {
  slug: string
  onAsk: (limits: Limits) => void
  problem: string | null
}

const COUNTS = Array.from({ length: REINFORCE_LINKS_MOST }, (_, i) => String(i + 1))

/** What the links must keep to. Changes nothing on the server. */
export function LimitsForm({ slug, onAsk, problem }: LimitsFormProps) {
  const nodes = useNodes(slug).data ?? []
  const keys = labelKeysOf(nodes)
  const labels = labelChoices(nodes)
  return (
    <form
      className="space-y-3"
      onSubmit={(event) => {
        event.preventDefault()
        const form = new FormData(event.currentTarget)
        const text = (name: keyof Limits) => String(form.get(name) ?? '')
        onAsk({
          ...{ links: text('links'), between: text('between'), mostDegree: text('mostDegree') },
          ...{ nodes: text('nodes'), label: text('label') },
        })
      }}
    >
      <div className="flex flex-wrap items-end gap-4">
        <SelectField
          label="Links at most"
          name="links"
          defaultValue={NO_LIMITS.links}
          options={COUNTS.map((value) => ({ value, label: value }))}
          className="w-32"
        />
        <SelectField
          label="Between"
          name="between"
          options={[
            { value: '', label: 'any two nodes' },
            ...keys.map((key) => ({ value: key, label: `different ${key}` })),
          ]}
          className="min-w-48"
        />
        <SelectField
          label="Only nodes with"
          name="label"
          options={[
            { value: '', label: 'any labels' },
            ...labels.map((pair) => ({ value: pair, label: pair })),
          ]}
          className="min-w-48"
        />
        <TextField
          label="Links a node may have"
          optional
          name="mostDegree"
          inputMode="numeric"
          pattern="[0-9]*"
          className="w-72"
        />
        <TextField
          label="Only these nodes"
          optional
          name="nodes"
          placeholder="tar-01, eel-09"
          className="w-64"
        />
        <Button type="submit">Work it out</Button>
      </div>
      {problem ? <Outcome ok={false}>{problem}</Outcome> : null}
    </form>
  )
}
