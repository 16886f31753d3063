'use client'

import { useState } from 'react'
import { useForm } from 'react-hook-form'
import { Button, Outcome, SelectField, Sheet, TextField } from '@/components/ui'
import type { UsualState, WarningRuleDto, WarningRules } from '@/lib/data/rules-dto'
import { formatReading } from '@/lib/face/format'
import {
  fieldProblems,
  fieldsOf,
  KIND_CHOICES,
  type RuleFields,
  ruleOfFields,
  startOf,
} from '@/lib/face/rule-fields'
import { submit } from '@/lib/http/form-state'
import { type Rule, ruleSchema, SEVERITIES } from '@/lib/warn/rule'
import { hasMargin, ruleSentence } from '@/lib/warn/rule-sentence'
import { KindFields, numberOf } from './kind-fields'
import { Preview } from './preview'
import type { WarningActions } from './types'

export interface RuleFormProps {
  slug: string
  /** Null for a new one. */
  rule: WarningRuleDto | null
  usual: UsualState
  callOrders: WarningRules['callOrders']
  actions: WarningActions
  onClose: () => void
  onDone: () => void
}

export function RuleForm({ slug, rule, usual, callOrders, actions, onClose, onDone }: RuleFormProps) {
  const form = useForm<RuleFields>({ defaultValues: fieldsOf(rule, usual.lambda2) })
  const [problem, setProblem] = useState<string | null>(null)
  const fields = form.watch()
  const { register, formState } = form
  const draft = ruleSchema.safeParse(ruleOfFields(fields, rule?.isOn ?? true))
  const problems = draft.success ? {} : fieldProblems(draft.error.issues)
  // What nobody has filled in yet is not wrong yet.
  const wrong = (name: keyof RuleFields) =>
    formState.isSubmitted || formState.dirtyFields[name] ? problems[name] : undefined

  async function save() {
    setProblem(null)
    const parsed = ruleSchema.safeParse(ruleOfFields(form.getValues(), rule?.isOn ?? true))
    if (!parsed.success) {
      setProblem('Some values cannot be used. Correct the fields marked above and save again.')
      return
    }
    const failed = await send(parsed.data).catch(() => 'The server could not be reached. Try again.')
    if (failed) setProblem(failed)
    else onDone()
  }

  async function send(next: Rule): Promise<string | null> {
    const text = JSON.stringify(next)
    const state = rule
      ? await submit(actions.change, { slug, id: rule.id, rule: text })
      : await submit(actions.add, { slug, rule: text })
    return state.status === 'failed' ? state.problem.detail : null
  }

  return (
    <Sheet
      heading={rule ? 'Change a rule' : 'Add a rule'}
      aside={usual.lambda2 === null ? 'usual not known yet' : `usual ${formatReading(usual.lambda2)}`}
    >
      <form onSubmit={form.handleSubmit(save)} className="space-y-5" noValidate>
        <p className="max-w-3xl text-lg">
          {draft.success ? ruleSentence(draft.data.settings) : 'Fill in the numbers.'}
        </p>
        <div className="flex flex-wrap gap-4">
          {rule ? null : (
            <SelectField
              label="Warn when"
              options={KIND_CHOICES}
              {...register('kind', {
                onChange: () => {
                  const { kind, callOrderId } = form.getValues()
                  form.reset({ ...startOf(kind, usual.lambda2), callOrderId })
                },
              })}
              className="min-w-64"
            />
          )}
          <KindFields kind={fields.kind} floorOf={fields.floorOf} register={register} wrong={wrong} />
        </div>
        <div className="flex flex-wrap items-end gap-4">
          <SelectField
            label="Severity"
            hint="Urgent reaches people in their quiet hours."
            options={SEVERITIES.map((value) => ({ value, label: value }))}
            {...register('severity')}
            className="min-w-44"
          />
          <SelectField
            label="Who is told"
            hint={
              callOrders.length === 0 ? 'Make a call order on the Telling page first.' : 'The call order.'
            }
            options={[
              { value: '', label: 'nobody: only recorded' },
              ...callOrders.map(({ id, name }) => ({ value: id, label: name })),
            ]}
            {...register('callOrderId')}
            className="min-w-56"
          />
        </div>
        <div className="flex flex-wrap items-end gap-4">
          <TextField
            label="Raise after, minutes"
            hint="Longer than a node takes to restart, so that a restart wakes nobody."
            inputMode="decimal"
            {...register('onMinutes', numberOf)}
            error={wrong('onMinutes')}
            className="w-64"
          />
          {hasMargin(fields.kind) ? (
            <TextField
              label="Clear past the limit by, %"
              hint="So that it does not come and go at its limit."
              inputMode="decimal"
              {...register('clearMarginPercent', numberOf)}
              error={wrong('clearMarginPercent')}
              className="w-64"
            />
          ) : null}
          <TextField
            label="Clear after, minutes"
            hint="So long it must have been over."
            inputMode="decimal"
            {...register('offMinutes', numberOf)}
            error={wrong('offMinutes')}
            className="w-64"
          />
        </div>
        <Preview slug={slug} rule={draft.success ? draft.data : null} />
        {problem ? <Outcome ok={false}>{problem}</Outcome> : null}
        <div className="flex flex-wrap gap-2">
          <Button type="submit" kind="main" busy={formState.isSubmitting} busyLabel="Saving…">
            {rule ? 'Save the rule' : 'Add the rule'}
          </Button>
          <Button kind="quiet" onClick={onClose}>
            Cancel
          </Button>
        </div>
      </form>
    </Sheet>
  )
}
