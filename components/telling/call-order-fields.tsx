'use client'

import { useRef, useState } from 'react'
import { Button, TextField } from '@/components/ui'
import type { CallOrder, Telling } from '@/lib/data/telling-dto'
import { type FormState, fieldError } from '@/lib/http/form-state'
import type { CallStep } from '@/lib/warn/call-order'

export interface CallOrderFieldsProps {
  telling: Telling
  /** Null for a new one. */
  order: CallOrder | null
  state: FormState<unknown>
}

type Listed = 'turnIds' | 'userIds' | 'webhookIds'
type KeyedStep = CallStep & { key: number }

/** Minutes that are proposed for a further step. */
const NEXT_AFTER_MINUTES = 10

export function CallOrderFields({ telling, order, state }: CallOrderFieldsProps) {
  const keys = useRef(0)
  const keyed = (step: CallStep): KeyedStep => ({ ...step, key: keys.current++ })
  const [steps, setSteps] = useState(() => (order?.steps ?? [emptyStep(0)]).map(keyed))
  const change = (index: number, step: KeyedStep) => setSteps(steps.with(index, step))
  const error = fieldError(state, 'steps')
  return (
    <>
      <TextField
        label="Name"
        name="name"
        defaultValue={order?.name}
        autoComplete="off"
        error={fieldError(state, 'name')}
      />
      <input type="hidden" name="steps" value={JSON.stringify(steps.map(({ key: _, ...step }) => step))} />
      {steps.map((step, index) => (
        <fieldset key={step.key} className="max-w-xl border border-edge px-3 pt-1 pb-3">
          <legend className="px-1 font-semibold">{index === 0 ? 'First' : `Step ${index + 1}`}</legend>
          <TextField
            label={
              index === 0
                ? 'Minutes after it is raised'
                : 'Minutes after the step before, while nobody has it'
            }
            type="number"
            min={0}
            max={1440}
            value={step.afterMinutes}
            onChange={(event) => change(index, { ...step, afterMinutes: Number(event.target.value) })}
            error={fieldError(state, `steps.${index}.afterMinutes`)}
          />
          <label className="mt-3 flex min-h-9 items-center gap-2">
            <input
              type="checkbox"
              checked={step.operators ?? false}
              onChange={() => change(index, { ...step, operators: !step.operators })}
              className="size-4 accent-(--ink)"
            />
            All operators and owners
          </label>
          <Several
            legend="Whoever has the turn"
            of="turnIds"
            {...{ step, index, change, choices: telling.turns }}
          />
          <Several legend="People" of="userIds" {...{ step, index, change, choices: telling.people }} />
          <Several
            legend="Webhooks"
            of="webhookIds"
            {...{ step, index, change, choices: telling.webhooks }}
          />
          {steps.length > 1 ? (
            <Button
              kind="quiet"
              className="-ml-2"
              onClick={() => setSteps(steps.filter((one) => one !== step))}
            >
              Remove this step
            </Button>
          ) : null}
        </fieldset>
      ))}
      {error ? <p className="border-l-4 border-ink pl-2 text-sm font-semibold">{error}</p> : null}
      <Button kind="quiet" onClick={() => setSteps([...steps, keyed(emptyStep(NEXT_AFTER_MINUTES))])}>
        Add a step
      </Button>
    </>
  )
}

const emptyStep = (afterMinutes: number): CallStep => ({
  afterMinutes,
  turnIds: [],
  userIds: [],
  webhookIds: [],
})

interface SeveralProps {
  legend: string
  of: Listed
  step: KeyedStep
  index: number
  change: (index: number, step: KeyedStep) => void
  choices: readonly { id: string; name: string }[]
}

function Several({ legend, of, step, index, change, choices }: SeveralProps) {
  if (choices.length === 0) return null
  const chosen = step[of]
  const toggle = (id: string) =>
    change(index, {
      ...step,
      [of]: chosen.includes(id) ? chosen.filter((one) => one !== id) : [...chosen, id],
    })
  return (
    <fieldset className="mt-3">
      <legend className="text-sm text-soft">{legend}</legend>
      <div className="flex flex-wrap gap-x-5">
        {choices.map(({ id, name }) => (
          <label key={id} className="flex min-h-9 items-center gap-2">
            <input
              type="checkbox"
              checked={chosen.includes(id)}
              onChange={() => toggle(id)}
              className="size-4 accent-(--ink)"
            />
            {name}
          </label>
        ))}
      </div>
    </fieldset>
  )
}
